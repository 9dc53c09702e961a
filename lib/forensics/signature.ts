// In: the messages of one controller. Out: its signature: for every habit a mean, its own jitter apart from the sampling
// error, and how often it is broken (stretching, pauses, noise).

import { type Ledger, VALUE } from "./ledger";
import {
  DATA_FALL,
  DATA_RISE,
  HABITS,
  HIGH_IN,
  HIGH_NINTH,
  HOLD_SR,
  HOLD_START,
  LOW_FIRST,
  LOW_IN,
  LOW_NEXT,
  LOW_NINTH,
  LOW_SR,
  LOW_STOP,
  type Messages,
  newSlots,
  readMessage,
  SETUP_SR,
} from "./message";
import { quantile } from "./normal";
import { byteRuns, PERIODS, runSpread } from "./period";

export interface HabitFigure {
  readonly mean: number;
  /** Variance of the controller's own timer, sampling error taken out, the error of `mean` put in. */
  readonly jitter: number;
  /** Share of occurrences that do not follow the habit. */
  readonly broken: number;
  readonly count: number;
}

export interface LevelFigure {
  readonly mean: number;
  readonly variance: number;
  readonly count: number;
}

export interface Signature {
  /** By habit; null where the capture does not show it. */
  readonly habits: readonly (HabitFigure | null)[];
  readonly sdaLow: LevelFigure | null;
  readonly sclLow: LevelFigure | null;
  readonly messages: number;
}

/** What the instrument adds to an instant, ticks. */
export interface Sampling {
  readonly step: number;
  /** Variance of one instant. */
  readonly variance: number;
  /**
   * How far the clock's evidence is believed, 0 to 1: with few samples in a low the sampling errors of neighbouring bits go
   * together, which the filter does not know.
   */
  readonly trust: number;
  /** Lows between bytes from this on, ticks, may be a target's and tell nobody's habit. */
  readonly long: number;
}

const ENOUGH = 400;
const LOOK = 200;

export function learn(ledger: Ledger, messages: Messages, members: readonly number[], sampling: Sampling): Signature {
  const values: number[][] = Array.from({ length: HABITS }, () => []);
  const after: number[] = [];
  const sda: number[] = [];
  const scl: number[] = [];
  const slots = newSlots();
  const stride = Math.max(1, Math.floor(members.length / 120));
  for (let i = 0; i < members.length; i += stride) {
    const m = members[i];
    readMessage(ledger, messages, m, slots, LOOK);
    for (let t = messages.first[m]; t < messages.first[m + 1]; t++) {
      const hold = ledger.hold[t];
      if (!Number.isNaN(hold)) values[t === messages.first[m] ? HOLD_START : HOLD_SR].push(hold);
    }
    for (let s = 0; s < slots.length; s++) {
      const e = slots.entry[s];
      // Once it is addressed a target may stretch every bit, so the habit is taken from the address byte.
      const later = slots.lowHabit[s] === LOW_IN && slots.pulse[s] > 8;
      add(later ? after : values[slots.lowHabit[s]], ledger.low[e]);
      add(values[slots.highHabit[s]], ledger.high[e]);
      if (slots.dataHabit[s] !== 0) add(values[slots.dataHabit[s]], ledger.first[e]);
      if (ledger.sdaLevel === null || ledger.sclLevel === null || slots.own[s] === 0) continue;
      if (slots.bus[s] === 0 && (ledger.what[e] & VALUE) === 0) add(sda, ledger.sdaLevel[e]);
      if (slots.lowHabit[s] === LOW_IN) add(scl, ledger.sclLevel[e]);
    }
  }
  const base = withLater(figure(values[LOW_IN], sampling, true, null), after, sampling);
  const habits = values.map((list, habit) => {
    if (habit === LOW_IN) return base;
    const lengthens = habit === LOW_NINTH || habit === LOW_NEXT || habit === LOW_FIRST || habit === LOW_SR || habit === LOW_STOP;
    return figure(list, sampling, lengthens, base);
  });
  steadied(habits, clockVariance(ledger, messages, members, stride, habits, sampling), sampling);
  return { habits: filled(habits), sdaLow: level(sda), sclLow: level(scl), messages: members.length };
}

/** Pairs of bytes from which a clock's jitter is taken. */
const PAIRS = 6;

interface ClockVariance {
  /** Of one period of the clock itself, with the error of finding it; NaN where too little is shown. */
  readonly period: number;
  /** Of a message's mean period, beyond what its periods' own variance and rounding explain. */
  readonly wander: number;
}

function clockVariance(
  ledger: Ledger,
  messages: Messages,
  members: readonly number[],
  stride: number,
  habits: readonly (HabitFigure | null)[],
  sampling: Sampling,
): ClockVariance {
  const low = habits[LOW_IN];
  const high = habits[HIGH_IN];
  if (low === null || high === null) return { period: Number.NaN, wander: 0 };
  const reach = 4 * Math.sqrt(Math.max(low.jitter, high.jitter) + 2 * sampling.variance);
  const slots = newSlots();
  const spread = runSpread(sampling);
  const bytes: { period: number; count: number }[] = [];
  for (let i = 0; i < members.length; i += stride) {
    readMessage(ledger, messages, members[i], slots, LOOK);
    const runs = byteRuns(ledger, slots, { low: low.mean, high: high.mean, reach });
    spread.add(runs);
    if (runs.length > 0) bytes.push({ period: runs.reduce((a, b) => a + b, 0) / runs.length / PERIODS, count: runs.length });
  }
  const period = spread.count < PAIRS ? Number.NaN : spread.variance(low.mean + high.mean) * (1 + 4 / spread.count);
  const own = Number.isNaN(period) ? low.jitter + high.jitter : period;
  return { period, wander: wanderOf(bytes, own, sampling) };
}

/** Messages that show whether a clock wanders. */
const SEVERAL = 8;

/** How much the periods of messages differ more than they should: a clock that drifts, or two that were not told apart. */
function wanderOf(
  messages: readonly { readonly period: number; readonly count: number }[],
  jitter: number,
  sampling: Sampling,
): number {
  const n = messages.length;
  if (n < SEVERAL) return 0;
  const middle = quantile(Float64Array.from(messages, (m) => m.period).sort(), 0.5);
  // A contested message here and there is not the clock's wandering.
  const kept = messages
    .map((m) => (m.period - middle) ** 2 - (3 * sampling.variance + PERIODS * jitter) / (PERIODS * PERIODS * m.count))
    .sort((a, b) => a - b)
    .slice(0, Math.ceil(0.9 * n));
  const mean = kept.reduce((a, b) => a + b, 0) / kept.length;
  const error = Math.sqrt(kept.reduce((a, b) => a + (b - mean) ** 2, 0)) / kept.length;
  return Math.max(0, mean - error);
}

/**
 * What single intervals show of a clock's jitter is blurred by rounding: a steady low of seven and a half samples reads as seven or eight.
 * Whole bytes show it better, so they bound it.
 */
function steadied(habits: (HabitFigure | null)[], clock: ClockVariance, sampling: Sampling): void {
  const low = habits[LOW_IN];
  const high = habits[HIGH_IN];
  if (low === null || high === null) return;
  const share = Number.isNaN(clock.period) ? 1 : Math.min(1, clock.period / (low.jitter + high.jitter));
  // One message's intervals wander together: that many of them say no more about the mean than this variance of each allows.
  const wander = (PERIODS * clock.wander) / 2;
  const floor = 0.01 * sampling.step * sampling.step;
  for (const [habit, figure] of [
    [LOW_IN, low],
    [HIGH_IN, high],
  ] as const) {
    const jitter = Math.max(share * figure.jitter, Math.min(figure.jitter, floor), (1e-4 * figure.mean) ** 2) + wander;
    habits[habit] = { ...figure, jitter: jitter + (jitter + 2 * sampling.variance) / figure.count };
  }
}

/** Lows inside later bytes say how often the habit is broken, not what it is. */
function withLater(base: HabitFigure | null, later: readonly number[], sampling: Sampling): HabitFigure | null {
  if (base === null) return figure(later, sampling, true, null);
  const reach = Math.max(1.3 * sampling.step, 5 * Math.sqrt(base.jitter + 2 * sampling.variance));
  const off = later.filter((x) => Math.abs(x - base.mean) > reach).length;
  const all = base.count + later.length + 1;
  return { ...base, broken: (base.broken * base.count + off + 0.5) / all };
}

function add(list: number[], x: number): void {
  if (!Number.isNaN(x) && list.length < ENOUGH) list.push(x);
}

/** A habit that the capture does not show is taken from its nearest kin, more loosely. */
function filled(habits: readonly (HabitFigure | null)[]): (HabitFigure | null)[] {
  const out = [...habits];
  const borrow = (to: number, from: number): void => {
    const kin = out[from];
    if (out[to] !== null || kin === null) return;
    out[to] = { mean: kin.mean, jitter: kin.jitter + (0.02 * kin.mean) ** 2, broken: 0.2, count: 0 };
  };
  for (const low of [LOW_FIRST, LOW_NINTH, LOW_NEXT, LOW_SR, LOW_STOP]) borrow(low, LOW_IN);
  borrow(HIGH_NINTH, HIGH_IN);
  borrow(HOLD_SR, HOLD_START);
  borrow(SETUP_SR, HIGH_IN);
  borrow(DATA_FALL, DATA_RISE);
  return out;
}

/** `lengthens`: others may only lengthen it, so the habit is the lowest crowd, not the middle. */
function figure(list: readonly number[], sampling: Sampling, lengthens: boolean, kin: HabitFigure | null): HabitFigure | null {
  if (list.length === 0) return null;
  const sorted = Float64Array.from(list).sort();
  const middle = quantile(sorted, 0.5);
  const half = lengthens ? middle - quantile(sorted, 0.16) : (quantile(sorted, 0.84) - quantile(sorted, 0.16)) / 2;
  // Inside bytes the left side of the crowd gives its width; the other lows have about the same.
  const own = kin === null ? Math.min(half, 0.05 * middle) : Math.sqrt(kin.jitter + 2 * sampling.variance);
  const centre = lengthens ? lowestCrowd(sorted, Math.max(2.2 * sampling.step, 5 * own, 0.002 * middle)) : middle;
  let reach = Math.max(1.3 * sampling.step, 4 * (lengthens ? own : Math.min(half, 0.15 * middle)), 0.001 * middle);
  // With few values the middle may lie between two of them, out of reach of both.
  const nearest = sorted.reduce((least, x) => Math.min(least, Math.abs(x - centre)), Number.POSITIVE_INFINITY);
  reach = Math.max(reach, nearest);
  let n = 0;
  let sum = 0;
  let square = 0;
  for (const x of sorted) {
    const d = x - centre;
    if (Math.abs(d) > reach) continue;
    n++;
    sum += d;
    square += d * d;
  }
  const mean = centre + sum / n;
  const variance = n > 1 ? Math.max(0, (square - (sum * sum) / n) / (n - 1)) : 0;
  const floor = Math.max(0.01 * sampling.step * sampling.step, (1e-4 * mean) ** 2);
  let jitter = Math.max(variance - 2 * sampling.variance, floor);
  if (kin !== null && n < 6) jitter = Math.max(jitter, kin.jitter);
  jitter += (jitter + 2 * sampling.variance) / n;
  return { mean, jitter, broken: (list.length - n + 0.5) / (list.length + 1), count: n };
}

/** Middle of the lowest window that holds a fair share of the values. */
function lowestCrowd(sorted: Float64Array, width: number): number {
  const n = sorted.length;
  const fair = Math.max(1, Math.min(8, Math.ceil(0.12 * n)));
  for (let i = 0; i + fair <= n; i++) {
    if (sorted[i + fair - 1] - sorted[i] > width) continue;
    let j = i + fair;
    while (j < n && sorted[j] - sorted[i] <= width) j++;
    return quantile(sorted.subarray(i, j), 0.5);
  }
  return quantile(sorted, 0.5);
}

function level(list: readonly number[]): LevelFigure | null {
  if (list.length < 3) return null;
  const sorted = Float64Array.from(list).sort();
  const half = Math.max((quantile(sorted, 0.84) - quantile(sorted, 0.16)) / 2, 0.0015, 0.015 * Math.abs(quantile(sorted, 0.5)));
  return { mean: quantile(sorted, 0.5), variance: half * half, count: list.length };
}
