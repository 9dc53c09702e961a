// In: the numbers of one column, one by one. Out: its two level clusters, in bounded memory whatever their range.

const BINS = 1024;

export interface Clusters {
  readonly low: number;
  readonly high: number;
  /** Spread (standard deviation) of the wider cluster. */
  readonly spread: number;
}

/** A histogram whose range doubles as needed, merging bins in pairs, so rare levels are never sampled away. */
export class Histogram {
  private counts = new Float64Array(BINS);
  /** Sum of the values in each bin, so that means do not depend on the bins' width. */
  private sums = new Float64Array(BINS);
  private from = Number.NaN;
  private width = 0;
  private repeats = 0;
  least = Number.POSITIVE_INFINITY;
  most = Number.NEGATIVE_INFINITY;
  total = 0;

  add(value: number): void {
    if (Number.isNaN(value)) return;
    this.total += 1;
    if (value < this.least) this.least = value;
    if (value > this.most) this.most = value;
    if (this.width === 0) {
      if (this.total === 1 || value === this.from) {
        this.from = value;
        this.repeats += 1;
        return;
      }
      this.begin(value);
    }
    let at = Math.floor((value - this.from) / this.width);
    while (at < 0 || at >= BINS) {
      this.grow(at < 0);
      at = Math.floor((value - this.from) / this.width);
    }
    this.counts[at] += 1;
    this.sums[at] += value;
  }

  /** The second distinct value sets the first bin width. */
  private begin(value: number): void {
    const first = this.from;
    this.width = Math.abs(value - first) / 64;
    this.from = Math.min(value, first) - this.width * (BINS / 2);
    const at = Math.floor((first - this.from) / this.width);
    this.counts[at] += this.repeats;
    this.sums[at] += this.repeats * first;
  }

  private grow(below: boolean): void {
    const merged = new Float64Array(BINS);
    const sums = new Float64Array(BINS);
    const shift = below ? BINS / 2 : 0;
    for (let i = 0; i < BINS; i += 2) {
      merged[shift + i / 2] = this.counts[i] + this.counts[i + 1];
      sums[shift + i / 2] = this.sums[i] + this.sums[i + 1];
    }
    if (below) this.from -= BINS * this.width;
    this.width *= 2;
    this.counts = merged;
    this.sums = sums;
  }

  /** The densest window in each half of the range; null where the numbers have one cluster only, or fewer than `samples` in one. */
  clusters(samples: number): Clusters | null {
    if (this.width === 0) return null;
    const range = this.most - this.least;
    const middle = (this.most + this.least) / 2;
    const window = Math.max(this.width, range * 0.06);
    const low = this.densest(this.least, middle, window);
    const high = this.densest(middle, this.most + this.width, window);
    if (low === null || high === null || low.count < samples || high.count < samples) return null;
    const swing = high.mean - low.mean;
    if (swing < range * 0.35) return null;
    // One broad cluster has its densest place in the middle; two have a valley there.
    const valley = this.share(low.mean + swing * 0.35, low.mean + swing * 0.65) / (swing * 0.3);
    const peak = Math.min(low.count, high.count) / window;
    if (valley > peak * 0.5) return null;
    return { low: low.mean, high: high.mean, spread: Math.max(low.spread, high.spread) };
  }

  private densest(from: number, to: number, window: number): { mean: number; count: number; spread: number } | null {
    const span = Math.max(1, Math.round(window / this.width));
    let best: { mean: number; count: number; spread: number } | null = null;
    const first = Math.max(0, Math.floor((from - this.from) / this.width));
    const last = Math.min(BINS - 1, Math.floor((to - this.from) / this.width));
    for (let at = first; at <= last; at += 1) {
      let count = 0;
      for (let i = at; i < Math.min(at + span, last + 1); i += 1) count += this.counts[i];
      if (count > (best?.count ?? 0)) best = this.moments(at, Math.min(at + span, last + 1), count);
    }
    return best;
  }

  private moments(first: number, end: number, count: number): { mean: number; count: number; spread: number } {
    let sum = 0;
    for (let i = first; i < end; i += 1) sum += this.sums[i];
    const mean = sum / count;
    let squares = 0;
    for (let i = first; i < end; i += 1) squares += this.counts[i] * (this.from + (i + 0.5) * this.width - mean) ** 2;
    return { mean, count, spread: Math.sqrt(squares / count) };
  }

  private share(from: number, to: number): number {
    let count = 0;
    for (let i = Math.floor((from - this.from) / this.width); i <= Math.floor((to - this.from) / this.width); i += 1)
      count += this.counts[i] ?? 0;
    return count;
  }
}
