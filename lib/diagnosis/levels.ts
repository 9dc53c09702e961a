// In: levels and rise times of a capture in volts. Out: the report's levels, and the range a pull-up must lie in.

import type { CaptureHead } from "../engine/samples/reader";
import type { Column } from "../limits/column";
import { THIRTY_TO_SEVENTY } from "../limits/edges";
import type { Measured } from "../limits/measure";
import { plateausOf } from "../limits/plateaus";
import type { Profile } from "../limits/profile";
import { driveOf, smallestPullUp, timeConstant } from "../limits/pullup";
import type { MeasurementRow } from "../limits/rows";
import type { Levels } from "./report";

export function levelsOf(
  head: CaptureHead,
  { levels: columns, edges }: Pick<Measured, "levels" | "edges">,
  rows: readonly MeasurementRow[],
  profile: Profile | null,
): Levels | null {
  // Raw converter counts have levels but no volts to show.
  if (columns === null || head.vdd_v === null) return null;
  const rise =
    rows.find((row) => row.symbol === "tr" && row.count > 0) ?? rows.find((row) => row.symbol === "trCL" && row.count > 0);
  // Hs rise times are always those of 30 % to 70 %.
  const ofEdges = rise?.symbol === "tr" ? edges : THIRTY_TO_SEVENTY;
  const drive = profile === null ? null : driveOf(profile.base ?? profile.name, head.vdd_v);
  return {
    scl_low: level(columns.sclLow),
    sda_low: level(columns.sdaLow),
    sda_high: level(columns.sdaHigh),
    scl_plateaus: plateausOf(columns.sclLow.values(), head.vdd_v),
    sda_plateaus: plateausOf(columns.sdaLow.values(), head.vdd_v),
    rc_s: rise === undefined || rise.p50 === null ? null : timeConstant(rise.p50, ofEdges.risePerRc),
    rp_min_ohm: drive === null ? null : smallestPullUp(head.vdd_v, drive.lowV, drive.sinkA),
    rc_max_s: rise === undefined || rise.limitMax === null ? null : timeConstant(rise.limitMax, ofEdges.limitPerRc),
  };
}

function level(column: Column) {
  if (column.count === 0) return null;
  return { count: column.count, min_v: column.min, p50_v: column.quantile(0.5), max_v: column.max };
}
