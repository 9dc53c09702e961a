// In: rows in which every channel has a time column of its own, so that one row holds different instants. Out: one order of
// events: each line's changes wait until the other line has been read as far, then leave merged.

import type { Warning } from "../../../base/result";
import { SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../edges";
import type { Comparator } from "./comparator";
import type { DigitalTap } from "./lines";
import type { RowTaker } from "./rows";
import { released } from "./takers";
import type { EdgeWriter } from "./writer";

const SCL_BITS = [0, SCL, SCL_UNKNOWN];
const SDA_BITS = [0, SDA, SDA_UNKNOWN];

/** Nearest tick of a time in seconds held as a double; exact for times below a thousand seconds at 1e12 ticks. */
export function tickOf(seconds: number, ticksPerSecond: number): number {
  return Math.round(seconds * ticksPerSecond) + 0;
}

/** One line of such a file: its own instants, and its changes that have not left yet. */
export class OwnTimeLine {
  /** Instant of the newest sample; +Infinity once the line's column has ended. */
  reached = Number.NEGATIVE_INFINITY;
  first = Number.NaN;
  backwards = 0;
  private newest = Number.NEGATIVE_INFINITY;
  private level = -1;
  private ticks: number[] = [];
  private levels: number[] = [];
  private leads: number[] = [];
  private next = 0;

  constructor(
    private readonly values: Float64Array,
    private readonly timeSlot: number,
    private readonly valueSlot: number,
    private readonly digital: DigitalTap | null,
    private readonly comparator: Comparator | null,
    private readonly ticksPerSecond: number,
  ) {}

  /** Takes the row at hand. A row without a time for this line says nothing about it: its list may be the shorter one. */
  take(): void {
    const seconds = this.values[this.timeSlot];
    if (Number.isNaN(seconds)) {
      this.reached = Number.POSITIVE_INFINITY;
      return;
    }
    const tick = tickOf(seconds, this.ticksPerSecond);
    if (tick < this.newest) {
      this.backwards += 1;
      return;
    }
    if (this.newest === Number.NEGATIVE_INFINITY) this.first = tick;
    this.newest = tick;
    this.reached = tick;
    let at = tick;
    let lead = 0;
    let level = 2;
    if (this.digital !== null) level = this.digital.level();
    else if (this.comparator !== null) {
      if (this.comparator.detect(tick, this.values[this.valueSlot])) {
        at = this.comparator.eventTick;
        lead = this.comparator.lead;
      }
      level = this.comparator.level;
    }
    if (level === this.level) return;
    this.level = level;
    this.ticks.push(at);
    this.levels.push(level);
    this.leads.push(lead);
  }

  get end(): number {
    return this.newest;
  }

  /** Instant of the oldest waiting change, or +Infinity. */
  peek(): number {
    return this.next < this.ticks.length ? this.ticks[this.next] : Number.POSITIVE_INFINITY;
  }

  shift(): { readonly level: number; readonly lead: number } {
    const found = { level: this.levels[this.next], lead: this.leads[this.next] };
    this.next += 1;
    if (this.next > 4096 && this.next * 2 > this.ticks.length) {
      this.ticks = this.ticks.slice(this.next);
      this.levels = this.levels.slice(this.next);
      this.leads = this.leads.slice(this.next);
      this.next = 0;
    }
    return found;
  }
}

/** A pair of lines in such a file, the bus or a drive tap, and where its merged events go. A line that is not there is unknown. */
export class OwnTimesPair {
  private sclLevel = 2;
  private sdaLevel = 2;

  constructor(
    readonly scl: OwnTimeLine | null,
    readonly sda: OwnTimeLine | null,
    private readonly inverted: boolean,
    private readonly writer: EdgeWriter,
  ) {}

  take(): void {
    this.scl?.take();
    this.sda?.take();
    this.drain(Math.min(this.scl?.reached ?? Number.POSITIVE_INFINITY, this.sda?.reached ?? Number.POSITIVE_INFINITY));
  }

  /** Changes before `until` are complete on both lines. */
  private drain(until: number): void {
    for (;;) {
      const scl = this.scl?.peek() ?? Number.POSITIVE_INFINITY;
      const sda = this.sda?.peek() ?? Number.POSITIVE_INFINITY;
      const tick = Math.min(scl, sda);
      if (!(tick < until)) return;
      const sclChange = scl === tick ? this.scl?.shift() : undefined;
      const sdaChange = sda === tick ? this.sda?.shift() : undefined;
      if (sclChange !== undefined) this.sclLevel = released(sclChange.level, this.inverted);
      if (sdaChange !== undefined) this.sdaLevel = released(sdaChange.level, this.inverted);
      const lines = SCL_BITS[this.sclLevel] | SDA_BITS[this.sdaLevel];
      this.writer.putVolts(tick, lines, sclChange?.lead ?? 0, sdaChange?.lead ?? 0, Number.NaN, Number.NaN);
    }
  }

  finish(): void {
    this.drain(Number.POSITIVE_INFINITY);
    this.writer.finish();
  }
}

export class OwnTimesTaker implements RowTaker {
  constructor(
    private readonly bus: OwnTimesPair,
    private readonly taps: readonly OwnTimesPair[],
  ) {}

  take(): void {
    this.bus.take();
    for (const tap of this.taps) tap.take();
  }

  orderLost(): boolean {
    return false;
  }

  finish(): void {
    this.bus.finish();
    for (const tap of this.taps) tap.finish();
  }

  private get lines(): OwnTimeLine[] {
    return [this.bus, ...this.taps].flatMap((pair) => [pair.scl, pair.sda]).filter((line) => line !== null);
  }

  get endTick(): number {
    return Math.max(...this.lines.map((line) => line.end));
  }

  warnings(): Warning[] {
    const count = this.lines.reduce((sum, line) => sum + line.backwards, 0);
    if (count === 0) return [];
    return [
      {
        code: "time-backwards",
        message: `${count} samples have a time before the one above them in their column; they were set aside.`,
        count,
      },
    ];
  }
}
