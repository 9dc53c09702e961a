// In: one parameter's intervals, one by one. Out: count, extremes with their places, quantiles, and the judges' counts.
// Nothing is allocated per interval.

import type { Judge } from "./judge";

/** Up to here quantiles are exact; beyond, they are a value that occurred within 1/64 octave (1.1 %) of the exact one. */
const EXACT = 4096;
/** 8 exponent bits and 6 mantissa bits of the single-precision value: 64 buckets per octave, found without a logarithm. */
const BUCKETS = 1 << 14;
const SHIFT = 17;
const MASK = BUCKETS - 1;
/** Buckets from here on hold no number: NaN falls there, which lets `span` pass over gaps without a branch. */
const NUMBERS = 255 << 6;
/** Slot of a byte in which the receiver acknowledges. */
export const ACK_SLOT = 8;
const float = new Float32Array(1);
const bits = new Uint32Array(float.buffer);

/** Where and what an extreme was. */
export interface Extreme {
  readonly measured: number;
  readonly tick: number;
  readonly transaction: number;
}

export class Column {
  min = Number.POSITIVE_INFINITY;
  max = Number.NEGATIVE_INFINITY;
  private minTick = 0;
  private maxTick = 0;
  private minTransaction = -1;
  private maxTransaction = -1;
  private lowGate = Number.NEGATIVE_INFINITY;
  private highGate = Number.POSITIVE_INFINITY;
  /** A value from `calmLow` to `calmHigh` neither is an extreme nor comes near a limit: it only counts. */
  private calmLow = Number.POSITIVE_INFINITY;
  private calmHigh = Number.NEGATIVE_INFINITY;
  private few = 0;
  private kept = new Float64Array(64);
  private buckets: Uint32Array | null = null;
  /** The first value that fell into each bucket. */
  private seen: Float64Array | null = null;

  /** `judges` has one place per profile tried; `widest` is the widest uncertainty that `add` will be given, in ticks. */
  constructor(
    readonly symbol: string,
    private readonly judges: readonly (Judge | null)[],
    private readonly widest: number,
  ) {
    this.setGates();
  }

  get count(): number {
    if (this.buckets === null) return this.few;
    let sum = 0;
    for (let b = 0; b < NUMBERS; b++) sum += this.buckets[b];
    return sum;
  }

  /** Sets the gates anew; judges that were dropped are asked no more. */
  setGates(): void {
    this.lowGate = Number.NEGATIVE_INFINITY;
    this.highGate = Number.POSITIVE_INFINITY;
    for (const judge of this.judges) {
      if (judge === null || judge.dropped) continue;
      this.lowGate = Math.max(this.lowGate, judge.lowGate(this.widest));
      this.highGate = Math.min(this.highGate, judge.highGate(this.widest));
    }
    this.setCalm();
  }

  private setCalm(): void {
    this.calmLow = Math.max(this.lowGate, this.min);
    this.calmHigh = Math.min(this.highGate, this.max);
  }

  /** The judge of one tried profile. */
  judgeOf(profile: number): Judge | null {
    return this.judges[profile] ?? null;
  }

  /**
   * Counts the intervals from `starts[i]` to `ends[i]`, none of them negative, of a run of entries of one transaction. Where one
   * of the two is NaN there is no interval. Nearly all intervals of a long capture pass here.
   */
  span(ends: Float64Array, starts: Float64Array, from: number, to: number, doubt: number, transaction: number): void {
    const { buckets, seen } = this;
    if (buckets === null || seen === null) {
      for (let i = from; i < to; i++) {
        const measured = ends[i] - starts[i];
        if (!Number.isNaN(measured)) this.add(measured, doubt, starts[i], transaction);
      }
      return;
    }
    let { calmLow, calmHigh } = this;
    for (let i = from; i < to; i++) {
      const measured = ends[i] - starts[i];
      float[0] = measured;
      const bucket = (bits[0] >>> SHIFT) & MASK;
      if (buckets[bucket]++ === 0) seen[bucket] = measured;
      if (measured < calmLow || measured > calmHigh) {
        this.notable(measured, doubt, starts[i], transaction);
        calmLow = this.calmLow;
        calmHigh = this.calmHigh;
      }
    }
  }

  /**
   * The same of a run of bits of which the first stands in `slot` of its byte: those in the acknowledge slot count in `other`. One
   * walk, as bytes are short beside what a walk costs. Returns the slot after them.
   */
  spanBytes(
    ends: Float64Array,
    starts: Float64Array,
    from: number,
    to: number,
    doubt: number,
    transaction: number,
    slot: number,
    other: Column,
  ): number {
    let at = slot;
    const { buckets, seen } = this;
    const { buckets: otherBuckets, seen: otherSeen } = other;
    if (buckets === null || seen === null || otherBuckets === null || otherSeen === null) {
      for (let i = from; i < to; i++) {
        (at === ACK_SLOT ? other : this).span(ends, starts, i, i + 1, doubt, transaction);
        at = at === ACK_SLOT ? 0 : at + 1;
      }
      return at;
    }
    for (let i = from; i < to; i++) {
      const measured = ends[i] - starts[i];
      float[0] = measured;
      const bucket = (bits[0] >>> SHIFT) & MASK;
      if (at < ACK_SLOT) {
        at++;
        if (buckets[bucket]++ === 0) seen[bucket] = measured;
        if (measured < this.calmLow || measured > this.calmHigh) this.notable(measured, doubt, starts[i], transaction);
      } else {
        at = 0;
        if (otherBuckets[bucket]++ === 0) otherSeen[bucket] = measured;
        if (measured < other.calmLow || measured > other.calmHigh) other.notable(measured, doubt, starts[i], transaction);
      }
    }
    return at;
  }

  /** `measured` and `doubt` in ticks; `tick` is where the interval begins. */
  add(measured: number, doubt: number, tick: number, transaction: number): void {
    if (this.buckets === null) this.keep(measured);
    else this.bucket(measured);
    if (measured < this.calmLow || measured > this.calmHigh) this.notable(measured, doubt, tick, transaction);
  }

  private notable(measured: number, doubt: number, tick: number, transaction: number): void {
    if (measured < this.min) {
      this.min = measured;
      this.minTick = tick;
      this.minTransaction = transaction;
      this.setCalm();
    }
    if (measured > this.max) {
      this.max = measured;
      this.maxTick = tick;
      this.maxTransaction = transaction;
      this.setCalm();
    }
    if (measured >= this.lowGate && measured <= this.highGate) return;
    for (const judge of this.judges) {
      if (judge !== null && !judge.dropped) judge.judge(measured, doubt, tick, transaction);
    }
  }

  private bucket(measured: number): void {
    if (this.buckets === null || this.seen === null) return;
    float[0] = measured;
    const bucket = measured > 0 ? bits[0] >>> SHIFT : 0;
    if (this.buckets[bucket]++ === 0) this.seen[bucket] = measured;
  }

  private keep(measured: number): void {
    if (this.few === this.kept.length) {
      const wider = new Float64Array(this.kept.length * 4);
      wider.set(this.kept);
      this.kept = wider;
    }
    this.kept[this.few++] = measured;
    if (this.few < EXACT) return;
    this.buckets = new Uint32Array(BUCKETS);
    this.seen = new Float64Array(BUCKETS);
    for (let i = 0; i < this.few; i++) this.bucket(this.kept[i]);
  }

  /** The value that `share` of all intervals do not exceed; NaN without any interval. */
  quantile(share: number): number {
    const { count } = this;
    if (count === 0) return Number.NaN;
    const rank = Math.max(0, Math.ceil(share * count) - 1);
    if (this.buckets === null || this.seen === null) return this.kept.slice(0, count).sort()[rank];
    let passed = 0;
    for (let b = 0; b < NUMBERS; b++) {
      passed += this.buckets[b];
      if (passed > rank) return Math.min(this.max, Math.max(this.min, this.seen[b]));
    }
    return this.max;
  }

  /** How many intervals are shorter than `bound`; within 1/64 octave of it where quantiles are. */
  countBelow(bound: number): number {
    if (this.min >= bound) return 0;
    let n = 0;
    if (this.buckets === null || this.seen === null) for (let i = 0; i < this.few; i++) n += this.kept[i] < bound ? 1 : 0;
    else for (let b = 0; b < NUMBERS; b++) if (this.buckets[b] > 0 && this.seen[b] < bound) n += this.buckets[b];
    return Math.max(1, n);
  }

  /** Every value and how often it came; beyond 4096 one value for each 1/64 octave. */
  values(): [number, number][] {
    const { buckets, seen } = this;
    if (buckets === null || seen === null) return [...this.kept.subarray(0, this.few)].map((value) => [value, 1]);
    const list: [number, number][] = [];
    for (let b = 0; b < NUMBERS; b++) if (buckets[b] > 0) list.push([seen[b], buckets[b]]);
    return list;
  }

  /** Pairs of a value and how many intervals lie near it (within 1/8 octave), in rising order. */
  distribution(): [number, number][] {
    const counts = new Map<number, number>();
    const note = (value: number, n: number) => {
      float[0] = value;
      const coarse = value > 0 ? (bits[0] >>> SHIFT) >> 3 : 0;
      counts.set(coarse, (counts.get(coarse) ?? 0) + n);
    };
    if (this.buckets === null || this.seen === null) for (let i = 0; i < this.few; i++) note(this.kept[i], 1);
    else for (let b = 0; b < NUMBERS; b++) if (this.buckets[b] > 0) note(this.seen[b], this.buckets[b]);
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
