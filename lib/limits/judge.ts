// In: measured intervals that are near a limit or beyond it. Out: how many are certainly beyond, how many are too close to
// call, and the worst of them. Everything is compared in ticks, so that a value exactly on its limit is exactly on it.

/** Broken limits kept per parameter, the worst first. */
export const WORST_KEPT = 1000;
/** A limit of 0 has no scale of its own; how bad a violation of it is counts against this many ns. */
const ZERO_LIMIT_SCALE_NS = 300;

/** One limit in ticks. A side without a limit is -Infinity or Infinity. */
export interface TickLimit {
  readonly min: number;
  readonly max: number;
}

export interface Worst {
  readonly measured: number;
  readonly tick: number;
  readonly transaction: number;
  readonly side: "min" | "max";
  /** How far beyond the limit, as a share of it. */
  readonly severity: number;
}

/** Judges one parameter by one profile. */
export class Judge {
  below = 0;
  above = 0;
  uncertain = 0;
  /** How near the nearest of the uncertain values is to its limit, ticks. */
  nearest = Number.POSITIVE_INFINITY;
  /** Asked no more: the profile it belongs to is out of the question. */
  dropped = false;
  private heap: Worst[] = [];

  constructor(
    readonly limit: TickLimit,
    private readonly ticksPerNs: number,
  ) {}

  /** Values between the two gates (both included) cannot matter to this judge. `doubt` is the widest uncertainty, in ticks. */
  lowGate(doubt: number): number {
    return this.limit.min + doubt;
  }

  highGate(doubt: number): number {
    return this.limit.max - doubt;
  }

  /**
   * Uncertainty is exclusive: an interval of n samples lies strictly within n - 1 and n + 1 sample times. Times that are exact
   * (doubt 0) are never too close to call, and a value on its limit passes.
   */
  judge(measured: number, doubt: number, tick: number, transaction: number): void {
    const { min, max } = this.limit;
    const distance = Math.min(Math.abs(measured - min), Math.abs(measured - max));
    if (distance < doubt) {
      this.uncertain++;
      if (distance < this.nearest) this.nearest = distance;
    } else if (measured < min) {
      this.below++;
      this.keep(measured, tick, transaction, "min", min);
    } else if (measured > max) {
      this.above++;
      this.keep(measured, tick, transaction, "max", max);
    }
  }

  /** The worst violations, worst first. */
  worst(): Worst[] {
    return [...this.heap].sort((a, b) => b.severity - a.severity || a.tick - b.tick);
  }

  // A heap with the mildest on top, so that most values of a long capture are turned away by one comparison.
  private keep(measured: number, tick: number, transaction: number, side: "min" | "max", limit: number): void {
    const scale = limit > 0 ? limit : ZERO_LIMIT_SCALE_NS * this.ticksPerNs;
    const severity = Math.abs(measured - limit) / scale;
    const { heap } = this;
    if (heap.length < WORST_KEPT) {
      heap.push({ measured, tick, transaction, side, severity });
      let i = heap.length - 1;
      while (i > 0) {
        const parent = (i - 1) >> 1;
        if (heap[parent].severity <= heap[i].severity) break;
        [heap[parent], heap[i]] = [heap[i], heap[parent]];
        i = parent;
      }
      return;
    }
    if (severity <= heap[0].severity) return;
    heap[0] = { measured, tick, transaction, side, severity };
    this.sink();
  }

  private sink(): void {
    const { heap } = this;
    let i = 0;
    for (;;) {
      const left = 2 * i + 1;
      if (left >= heap.length) return;
      const right = left + 1;
      const child = right < heap.length && heap[right].severity < heap[left].severity ? right : left;
      if (heap[i].severity <= heap[child].severity) return;
      [heap[i], heap[child]] = [heap[child], heap[i]];
      i = child;
    }
  }
}
