// In: one parameter's intervals, one by one. Out: count, extremes with their places, quantiles, and the judges' counts.
// Nothing is allocated per interval.

import type { Judge } from "./judge";

/** Up to here quantiles are exact; beyond, they are a value that occurred within 1/64 octave (1.1 %) of the exact one. */
const EXACT = 4096;
/** 8 exponent bits and 6 mantissa bits of the single-precision value: 64 buckets per octave, found without a logarithm. */
const BUCKETS = 1 << 14;
const SHIFT = 17;
const float = new Float32Array(1);
const bits = new Uint32Array(float.buffer);

/** Where and what an extreme was. */
export interface Extreme {
  readonly measured: number;
  readonly tick: number;
  readonly transaction: number;
}

export class Column {
  count = 0;
  min = Number.POSITIVE_INFINITY;
  max = Number.NEGATIVE_INFINITY;
  private minTick = 0;
  private maxTick = 0;
  private minTransaction = -1;
  private maxTransaction = -1;
  private lowGate = Number.NEGATIVE_INFINITY;
  private highGate = Number.POSITIVE_INFINITY;
  private judges: readonly (Judge | null)[] = [];
  private kept = new Float64Array(64);
  private buckets: Uint32Array | null = null;
  private seen: Float64Array | null = null;

  /** `judges` has one place per profile tried; `widest` is the widest uncertainty that `add` will be given, in ticks. */
  constructor(
    readonly symbol: string,
    judges: readonly (Judge | null)[],
    private readonly widest: number,
  ) {
    this.setJudges(judges);
  }

  setJudges(judges: readonly (Judge | null)[]): void {
    this.judges = judges;
    this.lowGate = Number.NEGATIVE_INFINITY;
    this.highGate = Number.POSITIVE_INFINITY;
    for (const judge of judges) {
      if (judge === null) continue;
      this.lowGate = Math.max(this.lowGate, judge.lowGate(this.widest));
      this.highGate = Math.min(this.highGate, judge.highGate(this.widest));
    }
  }

  /** The judge of one tried profile. */
  judgeOf(profile: number): Judge | null {
    return this.judges[profile] ?? null;
  }

  /** `measured` and `doubt` in ticks; `tick` is where the interval begins. */
  add(measured: number, doubt: number, tick: number, transaction: number): void {
    const n = this.count++;
    if (measured < this.min) {
      this.min = measured;
      this.minTick = tick;
      this.minTransaction = transaction;
    }
    if (measured > this.max) {
      this.max = measured;
      this.maxTick = tick;
      this.maxTransaction = transaction;
    }
    if (n < EXACT) this.keep(measured, n);
    else if (this.buckets !== null && this.seen !== null) {
      float[0] = measured;
      const bucket = measured > 0 ? bits[0] >>> SHIFT : 0;
      this.buckets[bucket]++;
      this.seen[bucket] = measured;
    }
    if (measured < this.lowGate || measured > this.highGate) this.ask(measured, doubt, tick, transaction);
  }

  private ask(measured: number, doubt: number, tick: number, transaction: number): void {
    for (const judge of this.judges) judge?.judge(measured, doubt, tick, transaction);
  }

  private keep(measured: number, n: number): void {
    if (n === this.kept.length) {
      const wider = new Float64Array(this.kept.length * 4);
      wider.set(this.kept);
      this.kept = wider;
    }
    this.kept[n] = measured;
    if (n !== EXACT - 1) return;
    const buckets = new Uint32Array(BUCKETS);
    const seen = new Float64Array(BUCKETS);
    for (const value of this.kept) {
      float[0] = value;
      const bucket = value > 0 ? bits[0] >>> SHIFT : 0;
      buckets[bucket]++;
      seen[bucket] = value;
    }
    this.buckets = buckets;
    this.seen = seen;
  }

  /** The value that `share` of all intervals do not exceed; NaN without any interval. */
  quantile(share: number): number {
    if (this.count === 0) return Number.NaN;
    const rank = Math.max(0, Math.ceil(share * this.count) - 1);
    if (this.buckets === null || this.seen === null || this.count <= EXACT) {
      return this.kept.slice(0, this.count).sort()[rank];
    }
    let passed = 0;
    for (let b = 0; b < BUCKETS; b++) {
      passed += this.buckets[b];
      if (passed > rank) return Math.min(this.max, Math.max(this.min, this.seen[b]));
    }
    return this.max;
  }

  /** Pairs of a value and how many intervals lie near it (within 1/8 octave), in rising order. */
  distribution(): [number, number][] {
    const counts = new Map<number, number>();
    const note = (value: number, n: number) => {
      float[0] = value;
      const coarse = value > 0 ? (bits[0] >>> SHIFT) >> 3 : 0;
      counts.set(coarse, (counts.get(coarse) ?? 0) + n);
    };
    if (this.buckets === null || this.seen === null) for (let i = 0; i < this.count; i++) note(this.kept[i], 1);
    else for (let b = 0; b < BUCKETS; b++) if (this.buckets[b] > 0) note(this.seen[b], this.buckets[b]);
    return [...counts].sort((a, b) => a[0] - b[0]).map(([coarse, n]) => [lowerEdge(coarse), n]);
  }

  smallest(): Extreme {
    return { measured: this.min, tick: this.minTick, transaction: this.minTransaction };
  }

  largest(): Extreme {
    return { measured: this.max, tick: this.maxTick, transaction: this.maxTransaction };
  }
}

function lowerEdge(coarse: number): number {
  bits[0] = (coarse << (SHIFT + 3)) >>> 0;
  return float[0];
}
