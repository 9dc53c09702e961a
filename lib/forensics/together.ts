// In: signatures. Out: the signature that two or more of them show while they clock and drive together. UM10204 3.1.7: LOW lasts
// as long as the longest, HIGH as the shortest; SDA falls with the earliest and rises with the latest; parallel pull-downs sink
// lower than one.

import { DATA_FALL, DATA_RISE, HABITS, HIGH_IN, HIGH_NINTH, LOW_IN, SETUP_SR, SETUP_STOP } from "./message";
import { larger, type Moments, smaller } from "./normal";
import type { HabitFigure, LevelFigure, Signature } from "./signature";

/** What synchronisation itself may add or take, as a share of the interval: input filters and edges differ when two drive. */
const SYNC_ERROR = 0.002;

export function together(a: Signature, b: Signature, vdd: number | null): Signature {
  const habits: (HabitFigure | null)[] = [];
  for (let h = 0; h < HABITS; h++) {
    const x = a.habits[h];
    const y = b.habits[h];
    if (x === null || y === null) {
      habits.push(null);
      continue;
    }
    const shorter = h === HIGH_IN || h === HIGH_NINTH || h === SETUP_SR || h === SETUP_STOP || h === DATA_FALL;
    const m = (shorter ? smaller : larger)(moments(x), moments(y));
    habits.push({
      mean: m.mean,
      jitter: m.variance + (SYNC_ERROR * m.mean) ** 2,
      broken: Math.max(x.broken, y.broken),
      count: Math.min(x.count, y.count),
    });
  }
  return {
    habits,
    sdaLow: parallel(a.sdaLow, b.sdaLow, vdd),
    sclLow: parallel(a.sclLow, b.sclLow, vdd),
    messages: 0,
  };
}

function moments(h: HabitFigure): Moments {
  return { mean: h.mean, variance: h.jitter };
}

/**
 * Level of two drivers sinking one pull-up at once. Each driver's conductance in units of the pull-up's is VDD / v - 1, and
 * conductances add (Ohm's law), so the pull-up need not be known.
 */
export function parallel(a: LevelFigure | null, b: LevelFigure | null, vdd: number | null): LevelFigure | null {
  if (a === null || b === null || vdd === null || a.mean <= 0 || b.mean <= 0) return null;
  const mean = vdd / (vdd / a.mean + vdd / b.mean - 1);
  return { mean, variance: Math.max(a.variance, b.variance) + (0.05 * mean) ** 2, count: Math.min(a.count, b.count) };
}

/** Whether clocking together would look different from `a` alone anywhere, in standard deviations of one interval. */
export function visibility(a: Signature, both: Signature, edgeVariance: number): number {
  let most = 0;
  for (const h of [LOW_IN, HIGH_IN, DATA_FALL, DATA_RISE]) {
    const x = a.habits[h];
    const y = both.habits[h];
    if (x === null || y === null || x.count === 0 || y.count === 0) continue;
    most = Math.max(most, Math.abs(x.mean - y.mean) / Math.sqrt(x.jitter + y.jitter + 2 * edgeVariance));
  }
  for (const key of ["sdaLow", "sclLow"] as const) {
    const x = a[key];
    const y = both[key];
    if (x !== null && y !== null) most = Math.max(most, Math.abs(x.mean - y.mean) / Math.sqrt(x.variance + y.variance));
  }
  return most;
}
