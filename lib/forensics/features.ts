// In: ledger and messages. Out: per message the figures by which controllers are told apart, with how sure each is: SCL low and
// high inside bytes, data delays, START hold, low levels. Stretching lengthens lows only, so the low is taken around the
// typical one of the address byte; a message whose beginning and end disagree is marked and left out of the clustering.

import { type Ledger, VALUE } from "./ledger";
import { DATA_FALL, DATA_RISE, HIGH_IN, LOW_IN, type Messages, newSlots, readMessage, type Slots } from "./message";
import { quantile } from "./normal";
import { beat, byteRuns, PERIODS, runSpread } from "./period";
import type { Sampling } from "./signature";

export const F_LOW = 0;
export const F_HIGH = 1;
export const F_FALL = 2;
export const F_RISE = 3;
export const F_HOLD = 4;
export const F_SDA_LEVEL = 5;
export const F_SCL_LEVEL = 6;
/** SCL rise to SCL rise inside bytes. All its sampling error is that of the outermost edges, so it is the sharpest figure. */
export const F_PERIOD = 7;
export const FEATURES = 8;

export interface Features {
  readonly messages: readonly number[];
  /** value[f][i] and count[f][i] for the i-th listed message; NaN and 0 where the message shows nothing. */
  readonly value: readonly Float64Array[];
  readonly count: readonly Float64Array[];
  /** 1 where beginning and end of the message agree. */
  readonly even: Uint8Array;
  /** Spread of one pulse about its message's mean, per feature: typical of the capture. */
  readonly spread: Float64Array;
  /** The same as a variance for each message: its own, drawn towards the typical one as far as it has few pulses. */
  readonly width: readonly Float64Array[];
  /** Share of the sampling error that more pulses of the message do not remove, 0 to 1: see `beat`. */
  readonly coherent: Float64Array;
  readonly step: number;
}

/** Variance of a figure of the i-th message, apart from what `bias` bounds. */
export function variance(features: Features, f: number, i: number): number {
  return features.width[f][i] / Math.max(1, features.count[f][i]);
}

/**
 * How far a figure of the i-th message may lie from that of another by the same controller only because the bit time is nearly a whole
 * number of samples: every pulse of a message is then rounded the same way. A bound, not a variance, and the same phase moves all figures.
 */
export function bias(features: Features, f: number, i: number): number {
  return f === F_LOW || f === F_HIGH || f === F_FALL || f === F_RISE ? features.coherent[i] * features.step : 0;
}

/** Longest stretch of a message that features are taken from, SCL pulses. */
const LOOK = 120;

export function featuresOf(ledger: Ledger, messages: Messages, list: readonly number[], sampling: Sampling): Features {
  // Step of a digital capture; crossings in volts are interpolated, which is like a finer one.
  const step = Math.sqrt(12 * sampling.variance);
  const n = list.length;
  const value = Array.from({ length: FEATURES }, () => new Float64Array(n).fill(Number.NaN));
  const count = Array.from({ length: FEATURES }, () => new Float64Array(n));
  const within: number[][] = Array.from({ length: FEATURES }, () => []);
  const width = Array.from({ length: FEATURES }, () => new Float64Array(n));
  const differing = runSpread(sampling);
  const slots = newSlots();
  const even = new Uint8Array(n);
  const halves: number[][] = [];
  for (let i = 0; i < n; i++) {
    readMessage(ledger, messages, list[i], slots, LOOK);
    const lists = collect(ledger, slots);
    const hold = ledger.hold[messages.first[list[i]]];
    if (!Number.isNaN(hold)) {
      value[F_HOLD][i] = hold;
      count[F_HOLD][i] = 1;
    }
    for (let f = 0; f < FEATURES; f++) {
      if (f === F_HOLD || lists[f].length === 0) continue;
      const head = f === F_LOW ? lists[f].slice(0, Math.min(7, lists[f].length)) : lists[f];
      const isLevel = f >= F_SDA_LEVEL;
      const window = isLevel ? 0.05 : Math.max(1.6 * step, 0.03 * quantile(Float64Array.from(head).sort(), 0.5));
      const m = trimmed(lists[f], head, window);
      value[f][i] = m.mean;
      count[f][i] = m.count;
      width[f][i] = m.variance;
      if (m.count >= 4) within[f].push(m.variance);
    }
    const runs = byteRuns(ledger, slots, {
      low: value[F_LOW][i],
      high: value[F_HIGH][i],
      reach: Math.max(2.1 * step, 0.06 * value[F_LOW][i]),
    });
    differing.add(runs);
    count[F_PERIOD][i] = PERIODS * runs.length;
    if (runs.length > 0) value[F_PERIOD][i] = runs.reduce((a, b) => a + b, 0) / count[F_PERIOD][i];
    halves.push(halfDifference(lists[F_LOW], value[F_LOW][i]), halfDifference(lists[F_HIGH], value[F_HIGH][i]));
  }
  const spread = new Float64Array(FEATURES);
  for (let f = 0; f < FEATURES; f++) {
    const sorted = Float64Array.from(within[f]).sort();
    const floor = f >= F_SDA_LEVEL ? 5e-4 : 0.29 * step;
    spread[f] = Math.max(Math.sqrt(sorted.length > 0 ? quantile(sorted, 0.5) : 0), floor);
  }
  spread[F_HOLD] = Math.max(spread[F_LOW], 0.41 * step) * 1.5;
  for (let i = 0; i < n; i++) {
    // Lows that become longer are a target's doing, which leaves the address byte to its controller; a contest makes them shorter.
    const [grown] = halves[2 * i];
    even[i] = (grown < 0 || agrees(halves[2 * i], spread[F_LOW])) && agrees(halves[2 * i + 1], spread[F_HIGH]) ? 1 : 0;
  }
  // Rather too steady a clock than one that is thought to average its rounding away.
  const jitter = Math.sqrt(differing.least() || 0);
  spread[F_PERIOD] = Math.sqrt(jitter ** 2 + (step * step) / (6 * PERIODS));
  width.forEach((list, f) => {
    for (let i = 0; i < n; i++) list[i] = shrunk(list[i], count[f][i], f === F_HOLD || f === F_PERIOD ? 0 : 1, spread[f]);
  });
  const coherent = Float64Array.from({ length: n }, (_, i) => {
    const bit = value[F_PERIOD][i] / step;
    return Number.isNaN(bit) || step <= 1 ? 0 : Math.sqrt(beat(bit, Math.max(1, count[F_LOW][i]), jitter / step) / FULL_BEAT);
  });
  return { messages: list, value, count, even, spread, width, coherent, step };
}

/** Pulses that the typical spread of the capture counts for beside a message's own. */
const TYPICAL_WEIGHT = 8;

function shrunk(own: number, count: number, known: number, typical: number): number {
  const n = known * Math.max(0, count - 1);
  return (TYPICAL_WEIGHT * typical * typical + n * Math.max(own, 0.5 * typical * typical)) / (TYPICAL_WEIGHT + n);
}

/** `beat` where the bit time is a whole number of samples and nothing jitters. */
const FULL_BEAT = beat(1, 1e9, 0);

function agrees(half: readonly number[], spread: number): boolean {
  const [difference, a, b] = half;
  return a === 0 || b === 0 || Math.abs(difference) < 4 * spread * Math.sqrt(1 / a + 1 / b);
}

function collect(ledger: Ledger, slots: Slots): number[][] {
  const out: number[][] = Array.from({ length: FEATURES }, () => []);
  for (let s = 0; s < slots.length; s++) {
    const e = slots.entry[s];
    if (slots.lowHabit[s] === LOW_IN) out[F_LOW].push(ledger.low[e]);
    if (slots.highHabit[s] === HIGH_IN && ledger.high[e] > 0) out[F_HIGH].push(ledger.high[e]);
    if (slots.dataHabit[s] === DATA_FALL) out[F_FALL].push(ledger.first[e]);
    else if (slots.dataHabit[s] === DATA_RISE) out[F_RISE].push(ledger.first[e]);
    if (ledger.sdaLevel === null || ledger.sclLevel === null || slots.own[s] === 0) continue;
    if ((ledger.what[e] & VALUE) === 0 && slots.bus[s] === 0 && !Number.isNaN(ledger.sdaLevel[e])) {
      out[F_SDA_LEVEL].push(ledger.sdaLevel[e]);
    }
    if (slots.lowHabit[s] === LOW_IN && !Number.isNaN(ledger.sclLevel[e])) out[F_SCL_LEVEL].push(ledger.sclLevel[e]);
  }
  return out;
}

/** Mean of the values within `window` of the median of `head`. */
function trimmed(
  list: readonly number[],
  head: readonly number[],
  window: number,
): { mean: number; variance: number; count: number } {
  const median = quantile(Float64Array.from(head).sort(), 0.5);
  let n = 0;
  let sum = 0;
  let square = 0;
  for (const x of list) {
    const d = x - median;
    if (Math.abs(d) > window) continue;
    n++;
    sum += d;
    square += d * d;
  }
  if (n === 0) return { mean: median, variance: 0, count: 0 };
  return { mean: median + sum / n, variance: Math.max(0, square / n - (sum / n) ** 2), count: n };
}

/** Median of the first seven less the median of the rest that lies near, with both counts. */
function halfDifference(list: readonly number[], mean: number): number[] {
  const a = list.slice(0, 7);
  const b = list.slice(7).filter((x) => Math.abs(x - mean) < 0.25 * mean);
  const average = (x: readonly number[]): number => x.reduce((p, q) => p + q, 0) / x.length;
  if (a.length < 4 || b.length < 4) return [0, 0, 0];
  return [average(a) - average(b), a.length, b.length];
}
