// In: values of a real net of a VCD. Out: thresholds estimated from them, and the comparator's levels. A VCD value holds
// until the next one (IEEE 1364-2005 18.2), so a crossing stands at the change that crosses: nothing is interpolated.

import { Comparator } from "./csv/comparator";

export interface Limits {
  readonly vdd: number;
  readonly vil: number;
  readonly vih: number;
}

/** VDD as the median of the upper half of the values seen, thresholds at 0.3 and 0.7 of it (UM10204 table 10). Null for a flat line. */
export function estimate(values: Float64Array): Limits | null {
  const known = values.filter((value) => !Number.isNaN(value)).sort();
  if (known.length < 2) return null;
  const middle = (known[0] + known[known.length - 1]) / 2;
  const upper = known.filter((value) => value > middle);
  if (upper.length === 0) return null;
  const vdd = upper[upper.length >> 1];
  return { vdd, vil: 0.3 * vdd, vih: 0.7 * vdd };
}

/** Levels of a recorded line, with hysteresis; for the survey. All unknown where there are no thresholds. */
export function levelsOf(values: Float64Array, limits: Limits | null): Uint8Array {
  if (limits === null) return new Uint8Array(values.length).fill(2);
  let level = 2;
  const levels = new Uint8Array(values.length);
  for (let i = 0; i < values.length; i++) {
    if (Number.isNaN(values[i])) level = 2;
    else if (values[i] >= limits.vih) level = 1;
    else if (values[i] <= limits.vil) level = 0;
    levels[i] = level;
  }
  return levels;
}

/** The comparator fed with values that hold: each change is preceded by the old value at the same tick. */
export class Held {
  readonly comparator: Comparator;
  private value = Number.NaN;

  constructor(limits: Limits, visit: (tick: number, width: number, extreme: number) => void) {
    this.comparator = new Comparator({ vil: limits.vil, vih: limits.vih, settle: 0.05 * limits.vdd }, 1, visit);
  }

  /** Whether the level changed; `lead` of the comparator then says how much earlier the other threshold was crossed. */
  push(tick: number, value: number): boolean {
    const { comparator } = this;
    if (!Number.isNaN(this.value)) {
      comparator.detect(tick, this.value);
      comparator.add(this.value);
    }
    this.value = value;
    return comparator.detect(tick, value);
  }

  /** Mean of what was settled since the last call. */
  mean(): number {
    if (!Number.isNaN(this.value)) this.comparator.add(this.value);
    return this.comparator.takeMean();
  }
}
