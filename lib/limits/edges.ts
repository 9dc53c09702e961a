// In: the levels that a capture in volts was read by, and the profile. Out: between which levels rise and fall times count, and how
// they follow from the crossings measured. I2C: the thresholds themselves, 30 % and 70 % of VDD. SMBus: VIL,MAX - 0.15 V and
// VIH,MIN + 0.15 V (BQ41Z50, TPS53676, E8870 data sheets, REFERENCE 4.1); a rise is carried over as that of an RC line (UM10204 7.1),
// a fall as a straight line (REFERENCE 7). With VIL and VIH given at those levels nothing is carried over.

import type { Profile } from "./profile";
import { RISE_PER_RC } from "./pullup";

export interface EdgePoints {
  /** What a measured time is multiplied by. */
  readonly rise: number;
  readonly fall: number;
  /** A rise between these points in units of RC. */
  readonly risePerRc: number;
  /** The same between the points that the rise limit holds for. */
  readonly limitPerRc: number;
  /** Null where they are 30 % and 70 % of VDD. */
  readonly words: { readonly rise: string; readonly fall: string } | null;
}

export interface ReadLevels {
  readonly vdd_v: number | null;
  readonly vil_v: number | null;
  readonly vih_v: number | null;
}

/** UM10204's points. */
export const THIRTY_TO_SEVENTY: EdgePoints = { rise: 1, fall: 1, risePerRc: RISE_PER_RC, limitPerRc: RISE_PER_RC, words: null };

/** SMBus rise and fall times run between levels this far outside VIL,MAX and VIH,MIN. */
const BEYOND_V = 0.15;

export function edgePoints({ vdd_v, vil_v, vih_v }: ReadLevels, profile: Profile | null): EdgePoints {
  const low = (profile?.limits.VIL?.max ?? Number.NaN) - BEYOND_V;
  const high = (profile?.limits.VIH?.min ?? Number.NaN) + BEYOND_V;
  const smbus = profile?.spec === "SMBus" && low < high;
  if (vdd_v === null || vil_v === null || vih_v === null)
    return smbus ? { ...THIRTY_TO_SEVENTY, words: wordsOf(low, high, null) } : THIRTY_TO_SEVENTY;
  const inRc = (from: number, to: number) => Math.log((vdd_v - from) / (vdd_v - to));
  // A supply below the upper point cannot reach it, and there is no such rise.
  if (!smbus || high >= vdd_v) return { ...THIRTY_TO_SEVENTY, risePerRc: inRc(vil_v, vih_v) };
  const carried = Math.abs(low - vil_v) > 0.005 || Math.abs(high - vih_v) > 0.005;
  return {
    rise: inRc(low, high) / inRc(vil_v, vih_v),
    fall: (high - low) / (vih_v - vil_v),
    risePerRc: inRc(low, high),
    limitPerRc: inRc(low, high),
    words: wordsOf(low, high, carried ? `the crossings of ${vil_v.toFixed(2)} V and ${vih_v.toFixed(2)} V` : null),
  };
}

/** @param crossings what the times are reckoned from, null where they are measured between the points themselves */
function wordsOf(low: number, high: number, crossings: string | null): EdgePoints["words"] {
  const from = `${low.toFixed(2)} V (VIL,MAX - 0.15 V)`;
  const to = `${high.toFixed(2)} V (VIH,MIN + 0.15 V)`;
  const by = (shape: string) => (crossings === null ? "" : `, reckoned from ${crossings} as ${shape}`);
  return {
    rise: `${from} to ${to}, SCL and SDA${by("an RC rise")}`,
    fall: `${to} to ${from}, SCL and SDA${by("a straight fall")}`,
  };
}
