// In: rows as a scanner reads them: an instant and the values of the wanted columns. Out: rows in time order for whoever
// takes them (survey, digital edges, volts), gaps cut, rows out of order set aside. The one judge of the time axis.

import type { Aside, AsideReason } from "./aside";
import type { RowBlock } from "./block";

/** What the scanner, the fast paths and the papaparse path all deliver to. */
export interface RowTarget {
  /** `values` of the scanner are filled. */
  row(tick: number, line: number): void;
  /** Rows of consecutive lines. */
  rows(block: RowBlock): void;
  aside(line: number, reason: AsideReason): void;
}

/** How instants follow each other. */
export interface Pace {
  /** Ticks between samples (may be fractional), or null for change times only. */
  readonly step: number | null;
  /** The file's times are rounded: instants are counted from the first row in steps. */
  readonly rebuilt: boolean;
  /** Ticks of one unit of the last digit of the times, with `rebuilt`. */
  readonly grain: number;
  /** The same as a part of the time itself, where times have a fixed number of digits (1.23E-03); otherwise 0. */
  readonly relative: number;
}

/** Takes rows in order. `cut`: rows are missing just before this one. */
export interface RowTaker {
  take(tick: number, cut: boolean): void;
  /** The same for rows `from` up to `to` of a block, none of them after a cut; absent, or false, where rows go one by one. */
  run?(block: RowBlock, from: number, to: number): boolean;
  /** Whether a lost sample just before these values leaves the order of the lines' changes open. */
  orderLost(): boolean;
  /** Takes the latest row back, whose time was wrong. False, or absent, where that cannot be. */
  retract?(tick: number): boolean;
}

interface HeldRow {
  readonly tick: number;
  readonly line: number;
  readonly values: Float64Array;
}

/** Set-aside rows between two samples that need not cut the record. */
const BRIDGED_ROWS = 8;

export class Rows implements RowTarget {
  count = 0;
  lastTick = Number.NEGATIVE_INFINITY;
  /** Instant of the row before the latest one. */
  beforeTick = Number.NEGATIVE_INFINITY;
  firstTick = 0;
  /** Instants from here on are a gap. */
  limit = Number.POSITIVE_INFINITY;
  cuts = 0;
  cutLine = 0;
  cutTicks = 0;
  lostRows = 0;
  lastLine = 0;
  readonly gap: number;
  private asideSince = 0;
  private pending: HeldRow | null = null;
  /** In a list of changes, a row before the latest one: which of the two times is wrong, the next row tells. */
  private doubted: HeldRow | null = null;
  private base = 0;
  private counted = 0;

  constructor(
    readonly taker: RowTaker,
    readonly values: Float64Array,
    readonly pace: Pace,
    readonly asides: Aside,
  ) {
    this.gap = pace.step === null ? Number.POSITIVE_INFINITY : pace.step * 1.5;
  }

  /** Whether the next row may be taken by a fast path. */
  get regular(): boolean {
    return this.pending === null && this.doubted === null && this.asideSince === 0 && this.count > 0 && !this.pace.rebuilt;
  }

  rows(block: RowBlock): void {
    for (let from = 0; from < block.length; ) {
      const to = this.regular ? this.regularUntil(block, from) : from;
      if (to > from) this.acceptRun(block, from, to);
      if (to < block.length) {
        block.lift(to, this.values);
        this.row(block.ticks[to], block.line + to);
      }
      from = to + 1;
    }
  }

  /** First row from `from` on that does not simply follow the one before it. */
  private regularUntil(block: RowBlock, from: number): number {
    const { gap } = this;
    const { ticks, length } = block;
    let last = this.lastTick;
    let to = from;
    for (; to < length; to += 1) {
      const tick = ticks[to];
      if (!(tick > last && tick < last + gap)) return to;
      last = tick;
    }
    return to;
  }

  private acceptRun(block: RowBlock, from: number, to: number): void {
    const { ticks } = block;
    if (this.taker.run?.(block, from, to) !== true) {
      for (let i = from; i < to; i += 1) {
        block.lift(i, this.values);
        this.taker.take(ticks[i], false);
      }
    }
    this.count += to - from;
    this.beforeTick = to - from > 1 ? ticks[to - 2] : this.lastTick;
    this.lastTick = ticks[to - 1];
    this.limit = this.lastTick + this.gap;
    this.lastLine = block.line + to - 1;
  }

  row(written: number, line: number): void {
    const tick = this.pace.rebuilt ? this.rebuild(written) : written;
    if (this.doubted !== null) this.settle(this.doubted, tick);
    if (this.pending === null && tick > this.lastTick && tick < this.limit && this.asideSince === 0) {
      this.accept(tick, false);
      this.lastLine = line;
    } else this.irregular(tick, line);
  }

  aside(line: number, reason: AsideReason): void {
    this.asides.add(line, reason);
    this.asideSince += 1;
  }

  finish(): void {
    if (this.pending !== null) this.release(this.pending);
    if (this.doubted !== null) this.aside(this.doubted.line, "backwards");
  }

  private accept(tick: number, cut: boolean): void {
    if (this.count === 0) this.firstTick = tick;
    this.count += 1;
    this.taker.take(tick, cut);
    this.beforeTick = this.lastTick;
    this.lastTick = tick;
    this.limit = tick + this.gap;
  }

  private irregular(tick: number, line: number): void {
    const pending = this.pending;
    if (pending !== null) {
      if (tick > this.lastTick && tick <= pending.tick) {
        // The held row jumped ahead and the file went on where it had been: the held row's time is the wrong one.
        this.pending = null;
        this.aside(pending.line, "backwards");
      } else this.release(pending);
    }
    if (this.count === 0) this.accept(tick, false);
    else if (tick <= this.lastTick) {
      if (tick === this.lastTick && this.pace.step === null) this.accept(tick, false);
      else if (this.pace.step === null && tick > this.beforeTick && this.asideSince === 0)
        this.doubted = { tick, line, values: this.values.slice() };
      else this.aside(line, "backwards");
      return;
    } else if (this.pace.step === null) {
      // A lost change may have been half of a pulse: nothing is decoded across it.
      if (this.asideSince > 0) this.noteCut(line, tick);
      this.accept(tick, this.asideSince > 0);
    } else if (tick >= this.limit && !this.bridged(tick, this.pace.step)) {
      this.pending = { tick, line, values: this.values.slice() };
      return;
    } else this.accept(tick, false);
    this.asideSince = 0;
    this.lastLine = line;
  }

  /** The row at hand goes on from the doubted one, so the row above that had jumped ahead; or the doubted one is wrong. */
  private settle(doubted: HeldRow, tick: number): void {
    this.doubted = null;
    if (tick >= this.lastTick || tick < doubted.tick || !this.taker.retract?.(this.lastTick)) {
      this.aside(doubted.line, "backwards");
      return;
    }
    this.aside(this.lastLine, "backwards");
    this.count -= 1;
    this.lastTick = this.beforeTick;
    const current = this.values.slice();
    this.values.set(doubted.values);
    const cut = this.count > 0;
    if (cut) this.noteCut(doubted.line, doubted.tick);
    this.accept(doubted.tick, cut);
    this.asideSince = 0;
    this.lastLine = doubted.line;
    this.values.set(current);
  }

  /** The gap is exactly the rows set aside in it, and no order of changes was lost with them. */
  private bridged(tick: number, step: number): boolean {
    const missing = Math.round((tick - this.lastTick) / step) - 1;
    return missing <= this.asideSince && this.asideSince <= BRIDGED_ROWS && !this.taker.orderLost();
  }

  /** Takes the held row: the gap before it is real. */
  private release(pending: HeldRow): void {
    this.pending = null;
    const current = this.values.slice();
    this.values.set(pending.values);
    this.noteCut(pending.line, pending.tick);
    if (this.pace.step !== null) this.lostRows += Math.max(1, Math.round((pending.tick - this.lastTick) / this.pace.step) - 1);
    this.accept(pending.tick, true);
    this.asideSince = 0;
    this.lastLine = pending.line;
    this.values.set(current);
  }

  private noteCut(line: number, tick: number): void {
    this.cuts += 1;
    if (this.cuts > 1) return;
    this.cutLine = line;
    this.cutTicks = tick - this.lastTick;
  }

  /** The uniform axis behind rounded times: counted on while it stays within one grain of what is written. */
  private rebuild(written: number): number {
    const step = this.pace.step ?? 1;
    if (this.count === 0 && this.pending === null) {
      this.base = written;
      this.counted = 0;
      return written;
    }
    this.counted += 1;
    const expected = Math.round(this.base + this.counted * step);
    const off = written - expected;
    const grain = Math.max(this.pace.grain, Math.abs(written) * this.pace.relative);
    if (Math.abs(off) <= grain) return expected;
    if (off > 0 && off < grain + step * 0.5) {
      // The step is known to a few digits only; the axis follows the file.
      this.base = written;
      this.counted = 0;
      return written;
    }
    if (off < 0 && -off < grain + step * 0.5) return expected;
    if (off > 0) {
      this.base = written;
      this.counted = 0;
    } else this.counted -= 1;
    return written;
  }
}
