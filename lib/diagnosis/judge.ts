// In: measured columns and what profiles were tried. Out: the profile that judges, its rows, and the report's measurements and
// violations.

import { judgeable } from "../base/time";
import type { CaptureHead } from "../engine/samples/reader";
import { slowestFitting } from "../limits/choice";
import type { Measured } from "../limits/measure";
import { MEXT, SEXT } from "../limits/parameters";
import { builtIn, type LimitTable, type Profile, TRIED_MODES } from "../limits/profile";
import { type MeasurementRow, measurementRows, type Place, rowOf } from "../limits/rows";
import { cumulativeStretch } from "../limits/stretching";
import type { Measurement, Stretch, Violation } from "./report";

/** Violations that a report lists. */
const LISTED = 1000;

/** The profiles a capture is measured against: the one asked for, or the modes to choose from; none on an assumed time base. */
export function triedProfiles(head: CaptureHead, asked: Profile | null, cbPf: number | null): Profile[] {
  if (!judgeable(head.timebase)) return [];
  return asked !== null ? [asked] : TRIED_MODES.map((name) => builtIn(name, cbPf));
}

/** The limits of Hs traffic whichever profile judges the rest, or null where nothing may be judged. */
export function highSpeedLimits(tried: readonly Profile[]): LimitTable | null {
  return tried.length === 0 ? null : tried[0].hs;
}

export interface Chosen {
  readonly profile: Profile;
  readonly index: number;
}

/** The profile that judges: the only one tried, or the slowest mode that the measured SCL fits; High-speed where Hs traffic was. */
export function chosenProfile(measured: Measured, tried: readonly Profile[], cbPf: number | null): Chosen | null {
  if (tried.length === 0) return null;
  if (tried.length === 1) return { profile: tried[0], index: 0 };
  const fitting = slowestFitting(measured.fs, tried);
  if (measured.hs === null) return { profile: tried[fitting], index: fitting };
  // High-speed traffic begins at Fast-mode (UM10204 5.3.2), so its own F/S part is judged by no slower mode.
  const index = Math.max(fitting, 1);
  return { profile: { ...builtIn("High-speed", cbPf), limits: tried[index].limits }, index };
}

/** All rows, with SMBus's sums of stretching where the profile has them. */
export function judgedRows(
  measured: Measured,
  chosen: Chosen | null,
  volts: boolean,
  stretches: readonly Stretch[],
  opening: (transaction: number) => number,
): MeasurementRow[] {
  const rows = measurementRows(measured, chosen, volts);
  if (chosen === null || chosen.profile.limits[SEXT.symbol] === undefined) return rows;
  const table = chosen.profile.limits;
  const { sext, mext } = cumulativeStretch(stretches, opening, table, measured.base, measured.doubt);
  const context = { measured, traffic: "F/S", by: { table, index: 0 }, volts, floor: null } as const;
  return [...rows, rowOf(sext, SEXT, context), rowOf(mext, MEXT, context)];
}

export function measurementsOf(rows: readonly MeasurementRow[]): Measurement[] {
  return rows.map((row) => ({
    parameter: row.symbol,
    count: row.count,
    min_s: row.min,
    p50_s: row.p50,
    max_s: row.max,
    limit_min_s: row.limitMin,
    limit_max_s: row.limitMax,
    below: row.below,
    above: row.above,
    uncertain: row.uncertain,
    traffic: row.traffic,
    p1_s: row.p1,
    p99_s: row.p99,
    verdict: row.verdict,
    unproven: row.unproven,
    uncertainty_s: row.uncertainty,
    bias_s: row.bias,
    points: row.points,
    clause: row.clause,
    note: row.note,
    needs_rate: row.needsRate,
    smallest: occurrenceOf(row.smallest),
    largest: occurrenceOf(row.largest),
    distribution: row.distribution.map(([from, count]) => [from, count] as [number, number]),
  }));
}

function occurrenceOf(place: Place | null) {
  return place === null ? null : { transaction: place.transaction, time_s: place.at, measured_s: place.measured };
}

/** The worst first, by how far beyond the limit as a share of it. */
export function violationsOf(rows: readonly MeasurementRow[]): Violation[] {
  return rows
    .flatMap((row) => row.violations.map((violated) => ({ symbol: row.symbol, violated })))
    .sort((a, b) => b.violated.severity - a.violated.severity || a.violated.at - b.violated.at)
    .slice(0, LISTED)
    .map(({ symbol, violated }) => ({
      parameter: symbol,
      transaction: violated.transaction,
      time_s: violated.at,
      measured_s: violated.measured,
      limit_s: violated.limit,
      side: violated.side,
    }));
}
