// In: a profile's limits in ns and Hz. Out: the same in ticks, as the judges compare them.

import type { Timebase } from "../base/time";
import type { TickLimit } from "./judge";
import { listedAs } from "./parameters";
import type { Limit, LimitTable } from "./profile";

const NS_PER_S = 1e9;

/** Ticks of a time in ns. Multiplied before it is divided, so that whole products stay exact. */
export function ticksOfNs(ns: number, base: Timebase): number {
  return (ns * base.ticksPerSecond) / NS_PER_S;
}

/** Bounds in ns as they are judged; a frequency becomes its period, and then its highest value is the shortest period. */
export function boundsNs(symbol: string, limit: Limit): { min: number | null; max: number | null } {
  if (symbol === "tTIMEOUT") {
    // 25 ms is from when devices may give up, 35 ms by when they must have: only the second bounds a low (RM0440, LM5066 notes).
    return { min: null, max: limit.max };
  }
  if (limit.unit === "Hz") {
    return {
      min: limit.max === null || limit.max === 0 ? null : NS_PER_S / limit.max,
      max: limit.min === null || limit.min === 0 ? null : NS_PER_S / limit.min,
    };
  }
  // Faster edges than the tables' minimum are shown, never failed (REFERENCE 1.7: revisions and data sheets differ).
  if (/^t[rf]/.test(symbol)) return { min: null, max: limit.max };
  // Spikes up to tSP are what the filter is for: no spike can break this limit.
  if (symbol === "tSP" || symbol === "tSPIKE") return { min: null, max: null };
  return { min: limit.min, max: limit.max };
}

/** The limit of a parameter in ticks, or null where the table has none. */
export function tickLimit(symbol: string, table: LimitTable, base: Timebase): TickLimit | null {
  const name = listedAs(symbol, table);
  if (name === null) return null;
  const { min, max } = boundsNs(name, table[name]);
  if (min === null && max === null) return null;
  return {
    min: min === null ? Number.NEGATIVE_INFINITY : ticksOfNs(min, base),
    max: max === null ? Number.POSITIVE_INFINITY : ticksOfNs(max, base),
  };
}
