// In: the clock periods of a whole capture. Out: the slowest of the tried modes that the measured SCL fits.

import type { ColumnSet } from "./columns";
import type { Profile } from "./profile";

/** A mode still fits with this share of its periods certainly too short: a broken clock must not change what it is judged by. */
const TOLERATED = 0.05;
/** Few periods: as many as this may be too short, but never more than a quarter of them. */
const TOLERATED_FEW = 3;

/** Index into `tried` (slowest first). The fastest is taken where none fits. */
export function slowestFitting(fs: ColumnSet, tried: readonly Profile[]): number {
  const { count } = fs.period;
  const tolerated = Math.max(Math.min(TOLERATED_FEW, Math.floor(count / 4)), Math.floor(count * TOLERATED));
  for (let k = 0; k < tried.length; k++) {
    const judge = fs.period.judgeOf(k);
    if (judge?.dropped !== true && (judge?.below ?? 0) <= tolerated) return k;
  }
  return Math.max(0, tried.length - 1);
}
