// In: samples of one line, in order. Out: its levels through a comparator with hysteresis: a rise is decided at VIH, a
// fall at VIL, at crossing times interpolated between samples; visits between the two that decided nothing; and grazes, which leave
// the settled high and come back without reaching VIH.

import type { Excursion } from "../edges";
import type { RowBlock } from "./block";

export interface Thresholds {
  /** In the column's own numbers (volts, or converter counts). */
  readonly vil: number;
  readonly vih: number;
  /** Change within the settling window up to which a sample counts as settled. */
  readonly settle: number;
}

/** Told when the line is back: since when it was away, for how long, and how far. */
export type Visitor = (tick: number, width: number, extreme: number) => void;

/** How far from the settled level a graze goes at least, in tolerances of settling: what noise does is none. */
const GRAZE = 2;

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
  /** Since when the line grazes; NaN while it does not. */
  private grazeAt = Number.NaN;
  private grazeBase = 0;
  private grazeExtreme = 0;

  /** `window`: samples over which a settled line may change by no more than `settle`. */
  constructor(
    thresholds: Thresholds,
    window: number,
    private readonly visit: Visitor,
    /** Told of grazes; null where nobody asks for them. */
    private readonly grazed: Visitor | null = null,
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
      if (!Number.isNaN(this.grazeAt)) this.graze(this.previousTick, v, 0);
      this.sum += v;
      this.count += 1;
    } else if (this.count > 0) this.graze(this.previousTick, v, this.sum / this.count);
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
    let grazes = !Number.isNaN(this.grazeAt);
    let { at, sum, count } = this;
    for (let i = from, place = from * width + slot; i < to; i += 1, place += width) {
      const v = readings[place];
      const change = v - ring[at];
      ring[at] = v;
      at = at + 1 === window ? 0 : at + 1;
      if (change <= settle && change >= -settle) {
        if (grazes) grazes = this.graze(ticks[i], v, 0);
        sum += v;
        count += 1;
      } else if (count > 0) grazes = this.graze(ticks[i], v, sum / count);
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
    this.grazeAt = Number.NaN;
    this.previous = Number.NaN;
    this.previousTick = Number.NaN;
    this.ring.fill(Number.NaN);
  }

  /**
   * Follows a sample above VIH, away from the settled `mean` or back; whether it is still away. A low is not followed: its steps are
   * drivers that take over from each other.
   */
  private graze(tick: number, v: number, mean: number): boolean {
    if (this.grazed === null || this.level !== 1) return false;
    if (Number.isNaN(this.grazeAt)) {
      if (mean - v < GRAZE * this.settle) return false;
      this.grazeAt = tick;
      this.grazeBase = mean;
      this.grazeExtreme = v;
      return true;
    }
    if (v < this.grazeExtreme) this.grazeExtreme = v;
    if (this.grazeBase - v > this.settle) return true;
    this.grazed(this.grazeAt, tick - this.grazeAt, this.grazeExtreme);
    this.grazeAt = Number.NaN;
    return false;
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
      this.grazeAt = Number.NaN;
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

/** Keeps the first excursions and counts all; of grazes, which lead nowhere, it keeps fewer and counts none. */
export class Excursions {
  private readonly kept: Excursion[] = [];
  count = 0;
  private static readonly KEPT = 10_000;
  /** For each line. */
  private static readonly GRAZES = 1_000;

  /** `volts`: false where the numbers have no scale, so that no voltage is shown. */
  constructor(private readonly volts: boolean) {}

  /** In order of time: runs of quiet samples are taken one line after the other. */
  get list(): readonly Excursion[] {
    return this.kept.toSorted((a, b) => a.tick - b.tick || (a.line < b.line ? -1 : 1));
  }

  visitor(line: "scl" | "sda"): Visitor {
    return (tick, width, extreme) => {
      this.count += 1;
      if (this.count <= Excursions.KEPT) this.kept.push({ line, tick, width, extreme_v: this.volts ? extreme : Number.NaN });
    };
  }

  /** Null where the numbers have no scale: what is a graze there is not shown anyway. */
  grazer(line: "scl" | "sda"): Visitor | null {
    if (!this.volts) return null;
    let seen = 0;
    return (tick, width, extreme) => {
      seen += 1;
      if (seen <= Excursions.GRAZES) this.kept.push({ line, tick, width, extreme_v: extreme });
    };
  }
}
