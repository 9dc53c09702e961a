// In: signatures and transactions. Out: how far each transaction's intervals, delays and levels lie from every controller's habits.
// The pass over everything, so it is kept cheap: no logarithms, no allocation.

import { type Ledger, MOVED_AGAIN, VALUE } from "./ledger";
import { DATA_FALL, DATA_RISE, HIGH_IN, HIGH_NINTH, HOLD_START, LOW_IN } from "./message";
import type { HabitFigure, Sampling, Signature } from "./signature";

/** A squared deviation counts for no more than this: one wild interval says that it is wild, not whose it is. */
const CAP = 20;
/** Squared deviations from which an interval, or the running sum of many, does not pass for the controller's own. */
const ODD = 15;
const ODD_SUM = 13;
/** One habit of every controller: mean and the inverse of its standard deviation; 0 where unknown. */
interface Gauge {
  readonly mean: Float64Array;
  readonly inverse: Float64Array;
}

function gauges(signatures: readonly Signature[], habit: number, sampling: Sampling): Gauge {
  const figures = signatures.map((s) => s.habits[habit]).map((h) => (h === null || h.count === 0 ? null : h));
  return {
    mean: Float64Array.from(figures, (h) => h?.mean ?? 0),
    inverse: Float64Array.from(figures, (h) => (h === null ? 0 : 1 / Math.sqrt(h.jitter + 2 * sampling.variance))),
  };
}

function levelGauge(levels: readonly Signature["sdaLow"][]): Gauge {
  return {
    mean: Float64Array.from(levels, (l) => l?.mean ?? 0),
    inverse: Float64Array.from(levels, (l) => (l === null ? 0 : 1 / Math.sqrt(l.variance + 1e-6))),
  };
}

/** Period of every controller, and how much of what one period varies by is the sampling's doing and not its clock's, 0 to 1. */
interface PeriodGauge {
  readonly mean: Float64Array;
  readonly jitter: Float64Array;
  readonly sampled: Float64Array;
  readonly edges: number;
}

function periodGauge(signatures: readonly Signature[], sampling: Sampling): PeriodGauge {
  const edges = 2 * sampling.variance;
  const of = (s: Signature, take: (low: HabitFigure, high: HabitFigure) => number): number => {
    const low = s.habits[LOW_IN];
    const high = s.habits[HIGH_IN];
    return low === null || high === null || low.count === 0 || high.count === 0 ? 0 : take(low, high);
  };
  return {
    mean: Float64Array.from(signatures, (s) => of(s, (low, high) => low.mean + high.mean)),
    jitter: Float64Array.from(signatures, (s) => of(s, (low, high) => low.jitter + high.jitter)),
    sampled: Float64Array.from(signatures, (s) => of(s, (low, high) => edges / (edges + 0.5 * (low.jitter + high.jitter)))),
    edges,
  };
}

/** Deviations of one message from every controller's habits. */
export class Tally {
  readonly score: Float64Array;
  readonly odd: Uint8Array;
  private readonly runLow: Float64Array;
  private readonly runHigh: Float64Array;
  private lows = 0;
  private highs = 0;
  counted = 0;
  /** Periods inside bytes, SCL rise to rise, how many and their sum; bytes they stand in. */
  periods = 0;
  periodSum = 0;
  bytes = 0;

  constructor(private readonly kinds: number) {
    this.score = new Float64Array(kinds);
    this.odd = new Uint8Array(kinds);
    this.runLow = new Float64Array(kinds);
    this.runHigh = new Float64Array(kinds);
  }

  reset(): void {
    this.score.fill(0);
    this.odd.fill(0);
    this.runLow.fill(0);
    this.runHigh.fill(0);
    this.lows = 0;
    this.highs = 0;
    this.counted = 0;
    this.periods = 0;
    this.periodSum = 0;
    this.bytes = 0;
  }

  /** A figure on its own. */
  one(gauge: Gauge, x: number): void {
    this.counted++;
    for (let c = 0; c < this.kinds; c++) {
      const z = (x - gauge.mean[c]) * gauge.inverse[c];
      const square = z * z;
      this.score[c] += Math.min(square, CAP);
      if (square > ODD) this.odd[c] = 1;
    }
  }

  low(gauge: Gauge, x: number): void {
    this.lows++;
    this.counted++;
    this.run(gauge, x, this.runLow, this.lows);
  }

  high(gauge: Gauge, x: number): void {
    this.highs++;
    this.counted++;
    this.run(gauge, x, this.runHigh, this.highs);
  }

  /**
   * The periods together: their sampling error is that of each byte's two outermost edges only, so where the sampling is coarse they say
   * more than the single intervals. Where the clock itself varies more they say nothing new.
   */
  clock(gauge: PeriodGauge): void {
    if (this.periods === 0) return;
    this.counted++;
    for (let c = 0; c < this.kinds; c++) {
      if (gauge.mean[c] === 0) continue;
      const d = this.periodSum - this.periods * gauge.mean[c];
      const square = (d * d) / (this.periods * gauge.jitter[c] + this.bytes * gauge.edges);
      this.score[c] += gauge.sampled[c] * Math.min(square, 2 * CAP);
    }
  }

  /** A figure whose deviations are summed too: a small one that lasts is as odd as a large one. */
  private run(gauge: Gauge, x: number, sums: Float64Array, n: number): void {
    const bound = ODD_SUM * n;
    for (let c = 0; c < this.kinds; c++) {
      const z = (x - gauge.mean[c]) * gauge.inverse[c];
      const square = z * z;
      const sum = sums[c] + z;
      sums[c] = sum;
      this.score[c] += Math.min(square, CAP);
      if (square > ODD || (sum * sum > bound && n > 2)) this.odd[c] = 1;
    }
  }
}

interface Gauges {
  readonly low: Gauge;
  readonly period: PeriodGauge;
  readonly high: Gauge;
  readonly ninth: Gauge;
  readonly fall: Gauge;
  readonly rise: Gauge;
  readonly hold: Gauge;
  readonly sda: Gauge;
  readonly scl: Gauge;
  readonly longest: number;
}

export function allGauges(signatures: readonly Signature[], sampling: Sampling): Gauges {
  const low = gauges(signatures, LOW_IN, sampling);
  let longest = 0;
  low.mean.forEach((mean, c) => {
    if (low.inverse[c] > 0) longest = Math.max(longest, mean + 6 / low.inverse[c]);
  });
  return {
    low,
    period: periodGauge(signatures, sampling),
    high: gauges(signatures, HIGH_IN, sampling),
    ninth: gauges(signatures, HIGH_NINTH, sampling),
    fall: gauges(signatures, DATA_FALL, sampling),
    rise: gauges(signatures, DATA_RISE, sampling),
    hold: gauges(signatures, HOLD_START, sampling),
    sda: levelGauge(signatures.map((s) => s.sdaLow)),
    scl: levelGauge(signatures.map((s) => s.sclLow)),
    longest,
  };
}

/** Deviations of one transaction, at most `limit` pulses of it. A low beyond every controller's own is a stretch and says nothing. */
export function tallyTransaction(ledger: Ledger, t: number, limit: number, g: Gauges, tally: Tally): void {
  const { low, high, first, what, sdaLevel, sclLevel } = ledger;
  const base = ledger.openEntry[t] + 1;
  const pulses = Math.min(ledger.pulses(t), limit);
  const read = pulses > 7 && (what[base + 7] & VALUE) !== 0;
  let bit = 0;
  let before = 0;
  let periods = 0;
  let periodSum = 0;
  let bytes = 0;
  for (let p = 0; p < pulses; p++) {
    const e = base + p;
    const l = low[e];
    const h = high[e];
    if (bit !== 0 && bit !== 8 && l < g.longest) {
      tally.low(g.low, l);
      periods++;
      periodSum += before + l;
      if (bit === 7) bytes++;
    }
    before = h;
    if (h > 0) {
      if (bit === 8) tally.one(g.ninth, h);
      else tally.high(g.high, h);
    }
    if (bit > 0 && bit < 8 && (!read || p < 8)) {
      const zero = (what[e] & VALUE) === 0;
      if (first[e] >= 0 && (what[e] & MOVED_AGAIN) === 0) tally.one(zero ? g.fall : g.rise, first[e]);
      if (sdaLevel !== null && sclLevel !== null) {
        if (sclLevel[e] > -100) tally.one(g.scl, sclLevel[e]);
        if (zero && sdaLevel[e] > -100) tally.one(g.sda, sdaLevel[e]);
      }
    }
    bit = bit === 8 ? 0 : bit + 1;
  }
  tally.periods += periods;
  tally.periodSum += periodSum;
  tally.bytes += bytes;
}
