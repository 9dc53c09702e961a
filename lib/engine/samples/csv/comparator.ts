// In: samples of one line, in order. Out: its levels through a comparator with hysteresis: a rise is decided at VIH, a
// fall at VIL, at crossing times interpolated between samples; and visits between the two that decided nothing.

import type { Excursion } from "../edges";
import type { RowBlock } from "./block";

export interface Thresholds {
  /** In the column's own numbers (volts, or converter counts). */
  readonly vil: number;
  readonly vih: number;
  /** Change within the settling window up to which a sample counts as settled. */
  readonly settle: number;
}

/** Longest settling window in samples. */
export const WINDOW_LIMIT = 64;

export class Comparator {
  /** 0, 1, or 2 for unknown. */
  level = 2;
  /** Instant of the change that the latest `detect` found. */
  eventTick = 0;
  /** Time from the other threshold's crossing to the deciding one; NaN where unknown. */
  lead = 0;
  readonly vil: number;
  readonly vih: number;
  private readonly settle: number;
  /** A sample stood between the thresholds since the level was last decided or confirmed. */
  private between = false;
  private leftAt = Number.NaN;
  private extreme = 0;
  previous = Number.NaN;
  previousTick = Number.NaN;
  private sum = 0;
  private count = 0;
  private readonly ring: Float64Array;
  private at = 0;

  /** `window`: samples over which a settled line may change by no more than `settle`. */
  constructor(
    thresholds: Thresholds,
    window: number,
    private readonly visit: (tick: number, width: number, extreme: number) => void,
  ) {
    this.vil = thresholds.vil;
    this.vih = thresholds.vih;
    this.settle = thresholds.settle;
    this.ring = new Float64Array(Math.max(1, Math.min(WINDOW_LIMIT, window))).fill(Number.NaN);
  }

  /** Whether the line changed between the previous sample and this one. */
  detect(tick: number, v: number): boolean {
    let changed = false;
    if (Number.isNaN(v)) changed = this.lose(tick);
    else if (this.level === 1) changed = v < this.vih ? this.dip(tick, v) : this.back(tick, v, this.vih);
    else if (this.level === 0) changed = v > this.vil ? this.climb(tick, v) : this.back(tick, v, this.vil);
    else changed = this.begin(tick, v);
    this.previous = v;
    this.previousTick = tick;
    return changed;
  }

  /** Adds the sample to the mean of the running interval if it has settled. */
  add(v: number): void {
    const ago = this.ring[this.at];
    this.ring[this.at] = v;
    this.at = this.at + 1 === this.ring.length ? 0 : this.at + 1;
    if (this.between || this.level === 2) return;
    const change = v - ago;
    if (change <= this.settle && change >= -this.settle) {
      this.sum += v;
      this.count += 1;
    }
  }

  /** Whether the sample changes nothing but the mean: the level is decided and the sample lies on its side. */
  isQuiet(v: number): boolean {
    return !this.between && (this.level === 1 ? v >= this.vih : this.level === 0 && v <= this.vil);
  }

  /** Takes a quiet sample, as `detect` and `add` would. */
  quiet(tick: number, v: number): void {
    this.previous = v;
    this.previousTick = tick;
    this.add(v);
  }

  /** First row of a block, from `from` on, whose reading `slot` is not quiet; `to` where all are. */
  quietUntil(block: RowBlock, slot: number, from: number, to: number): number {
    const { readings, width } = block;
    if (this.between || this.level === 2) return from;
    // NaN is never quiet.
    const high = this.level === 1;
    const least = high ? this.vih : Number.NEGATIVE_INFINITY;
    const most = high ? Number.POSITIVE_INFINITY : this.vil;
    let at = from * width + slot;
    let i = from;
    for (; i < to; i += 1, at += width) {
      const v = readings[at];
      if (!(v >= least && v <= most)) break;
    }
    return i;
  }

  /** Takes quiet rows, at least one. */
  quietRun(block: RowBlock, slot: number, from: number, to: number): void {
    const { readings, width, ticks } = block;
    const { ring, settle } = this;
    const window = ring.length;
    let { at, sum, count } = this;
    for (let i = from, place = from * width + slot; i < to; i += 1, place += width) {
      const v = readings[place];
      const change = v - ring[at];
      ring[at] = v;
      at = at + 1 === window ? 0 : at + 1;
      if (change <= settle && change >= -settle) {
        sum += v;
        count += 1;
      }
    }
    this.at = at;
    this.sum = sum;
    this.count = count;
    this.previous = readings[(to - 1) * width + slot];
    this.previousTick = ticks[to - 1];
  }

  /** Mean of the settled samples since the last call; NaN where there were none. */
  takeMean(): number {
    const mean = this.count === 0 ? Number.NaN : this.sum / this.count;
    this.sum = 0;
    this.count = 0;
    return mean;
  }

  /** Forgets everything: the record was cut. */
  reset(): void {
    this.level = 2;
    this.between = false;
    this.leftAt = Number.NaN;
    this.previous = Number.NaN;
    this.previousTick = Number.NaN;
    this.ring.fill(Number.NaN);
  }

  private lose(tick: number): boolean {
    const changed = this.level !== 2;
    this.reset();
    this.eventTick = tick;
    this.lead = Number.NaN;
    return changed;
  }

  private begin(tick: number, v: number): boolean {
    if (v < this.vih && v > this.vil) return false;
    this.level = v >= this.vih ? 1 : 0;
    const known = !Number.isNaN(this.previous);
    this.eventTick = known ? this.crossing(tick, v, this.level === 1 ? this.vih : this.vil) : tick;
    this.lead = Number.NaN;
    this.between = false;
    return true;
  }

  private dip(tick: number, v: number): boolean {
    if (!this.between) {
      this.leftAt = this.crossing(tick, v, this.vih);
      this.between = true;
      this.extreme = v;
    } else if (v < this.extreme) this.extreme = v;
    return v <= this.vil && this.decide(tick, v, this.vil, 0);
  }

  private climb(tick: number, v: number): boolean {
    if (!this.between) {
      this.leftAt = this.crossing(tick, v, this.vil);
      this.between = true;
      this.extreme = v;
    } else if (v > this.extreme) this.extreme = v;
    return v >= this.vih && this.decide(tick, v, this.vih, 1);
  }

  private decide(tick: number, v: number, threshold: number, level: number): boolean {
    this.eventTick = this.crossing(tick, v, threshold);
    this.lead = this.eventTick - this.leftAt;
    this.level = level;
    this.between = false;
    return true;
  }

  private back(tick: number, v: number, threshold: number): boolean {
    if (this.between) {
      this.between = false;
      this.visit(this.leftAt, this.crossing(tick, v, threshold) - this.leftAt, this.extreme);
    }
    return false;
  }

  /** After the previous sample's tick and no later than this one's. */
  private crossing(tick: number, v: number, threshold: number): number {
    const from = this.previousTick;
    if (Number.isNaN(from) || v === this.previous) return tick;
    const at = Math.round(from + ((threshold - this.previous) / (v - this.previous)) * (tick - from));
    return at <= from ? Math.min(tick, from + 1) : Math.min(at, tick);
  }
}

/** Keeps the first excursions and counts all. */
export class Excursions {
  readonly list: Excursion[] = [];
  count = 0;
  private static readonly KEPT = 10_000;

  /** `volts`: false where the numbers have no scale, so that no voltage is shown. */
  constructor(private readonly volts: boolean) {}

  visitor(line: "scl" | "sda"): (tick: number, width: number, extreme: number) => void {
    return (tick, width, extreme) => {
      this.count += 1;
      if (this.list.length < Excursions.KEPT) this.list.push({ line, tick, width, extreme_v: this.volts ? extreme : Number.NaN });
    };
  }
}
