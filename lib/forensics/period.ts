// In: SCL rises inside bytes. Out: the period of a clock and how much it varies, free of most of the sampling error: that of seven
// periods together is the error of two edges.

import type { Ledger } from "./ledger";
import { HIGH_IN, type Slots } from "./message";

/** Periods in one byte, from the rise of its first pulse to that of its eighth. */
export const PERIODS = 7;

/**
 * Sampling error does not average out when the bit time is nearly a whole number of samples, or of halves, thirds ...: every pulse is then
 * sampled at the same phase. q-th harmonic of the sawtooth of rounding, averaged over n pulses that advance by `bit` samples each.
 */
export function beat(bit: number, n: number, jitter: number): number {
  let sum = 0;
  for (let q = 1; q <= 5; q++) {
    const slip = Math.max(Math.abs(q * bit - Math.round(q * bit)), q * jitter);
    const left = Math.min(1, 1 / (Math.PI * n * slip + 1e-12));
    sum += (left / q) ** 2;
  }
  return sum / 12;
}

/** Intervals that belong to the message's own clock. */
export interface Near {
  readonly low: number;
  readonly high: number;
  /** How far an interval may be off. */
  readonly reach: number;
}

/** Sums of seven periods, byte by byte, of those bytes in which no interval is far from the message's own. */
export function byteRuns(ledger: Ledger, slots: Slots, near: Near): number[] {
  const out: number[] = [];
  let run = 0;
  let sum = 0;
  for (let s = 0; s < slots.length; s++) {
    if (slots.highHabit[s] !== HIGH_IN || slots.pulse[s] % 9 === 0) {
      run = 0;
      sum = 0;
      continue;
    }
    const high = ledger.high[slots.entry[s - 1]];
    const low = ledger.low[slots.entry[s]];
    const fits = Math.abs(low - near.low) < near.reach && Math.abs(high - near.high) < near.reach;
    run = fits ? run + 1 : -PERIODS;
    sum += high + low;
    if (run === PERIODS) out.push(sum);
  }
  return out;
}

/** Share of the squares that certainly holds no contest and no stretch. */
const CORE = 0.9;
/** Mean of the lower nine tenths of the chi-squared distribution with one degree of freedom: P(3 degrees < 2.7055) / 0.9, by its tables. */
const CORE_MEAN = 0.6232;
/** Squares beyond this many variances are not the clock's own. */
const FAR_OFF = 9;

/** How far the bytes of single messages differ: gathered from many messages. */
class RunSpread {
  /** Half squared differences of two runs, and how many steps apart they are. */
  private readonly squares: number[] = [];

  /** @param step of a digital capture; 0 where crossings are interpolated, @param edges variance that sampling then gives to one interval */
  constructor(
    private readonly step: number,
    private readonly edges: number,
  ) {}

  /** @param runs of one message */
  add(runs: readonly number[]): void {
    for (let i = 0; i + 1 < runs.length; i += 2) this.squares.push((runs[i] - runs[i + 1]) ** 2 / 2);
  }

  get count(): number {
    return this.squares.length;
  }

  /**
   * Variance of one period of messages by whomever, not more than it is: two equal runs, rounded, are a step apart at most, and then that
   * is put down to rounding. NaN where nothing is known.
   */
  least(): number {
    const { step, edges } = this;
    const odd = (square: number): boolean => Math.round(Math.sqrt(2 * square) / step) % 2 === 1;
    return (
      Math.max(
        0,
        this.mean((square) => square - (step > 0 ? (odd(square) ? step ** 2 / 2 : 0) : edges), -2),
      ) / PERIODS
    );
  }

  /**
   * Variance of one period of a clock of that period, with the standard error of the estimate on top. NaN where nothing is known.
   * Seven periods gather seven times the variance of one, while the error of their two edges stays what it is.
   */
  variance(period: number): number {
    const seen = this.mean((square) => square, 1);
    if (this.step === 0) return Math.max(0, seen - this.edges) / PERIODS;
    return (unrounded(seen / this.step ** 2, (PERIODS * period) / this.step) * this.step ** 2) / PERIODS;
  }

  private mean(of: (square: number) => number, sigma: number): number {
    if (this.squares.length === 0) return Number.NaN;
    const sorted = this.squares.map(of).sort((a, b) => a - b);
    const core = meanOf(sorted.slice(0, Math.ceil(CORE * sorted.length))) / CORE_MEAN;
    const most = FAR_OFF * Math.max(core, this.step ** 2 / 6, this.edges);
    const kept = sorted.filter((x) => x <= most);
    const mean = meanOf(kept);
    return mean + (sigma * Math.sqrt(meanOf(kept.map((x) => (x - mean) ** 2)))) / Math.sqrt(kept.length);
  }
}

/** Variance of a normal quantity of mean `length` of which the rounded values, at any phase, have variance `seen`; all in steps. */
function unrounded(seen: number, length: number): number {
  // Fourier series of the variance that rounding both ends adds: f(1 - f) for a steady length with fraction f, 1/6 for one that jitters.
  const total = (v: number): number => {
    let sum = v + 1 / 6;
    for (let k = 1; k <= 4; k++)
      sum -= (Math.cos(2 * Math.PI * k * length) * Math.exp(-2 * Math.PI ** 2 * k * k * v)) / (Math.PI * k) ** 2;
    return sum;
  };
  let low = 0;
  let high = Math.max(seen, 1e-6);
  for (let i = 0; i < 30; i++) {
    const middle = (low + high) / 2;
    if (total(middle) < seen) low = middle;
    else high = middle;
  }
  return low;
}

/** Crossings in volts are interpolated, which the variance of an instant tells from that of a rounded one. */
export function runSpread(sampling: { readonly step: number; readonly variance: number }): RunSpread {
  const rounded = sampling.variance > 0.9 * (sampling.step ** 2 / 12);
  return new RunSpread(rounded ? sampling.step : 0, 2 * sampling.variance);
}

function meanOf(list: readonly number[]): number {
  return list.reduce((a, b) => a + b, 0) / Math.max(1, list.length);
}
