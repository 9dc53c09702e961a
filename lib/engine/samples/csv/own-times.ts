// In: rows in which every channel has a time column of its own, so that one row holds different instants. Out: one order of
// events: each line's changes wait until the other line has been read as far, then leave merged.

import type { Warning } from "../../../base/result";
import { SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../edges";
import type { Comparator } from "./comparator";
import type { DigitalTap } from "./lines";
import type { RowTaker } from "./rows";
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

export class OwnTimesTaker implements RowTaker {
  private sclLevel = 2;
  private sdaLevel = 2;

  constructor(
    private readonly scl: OwnTimeLine,
    private readonly sda: OwnTimeLine,
    readonly writer: EdgeWriter,
  ) {}

  take(): void {
    this.scl.take();
    this.sda.take();
    this.drain(Math.min(this.scl.reached, this.sda.reached));
  }

  orderLost(): boolean {
    return false;
  }

  /** Changes before `until` are complete on both lines. */
  private drain(until: number): void {
    for (;;) {
      const scl = this.scl.peek();
      const sda = this.sda.peek();
      const tick = Math.min(scl, sda);
      if (!(tick < until)) return;
      let leadScl = 0;
      let leadSda = 0;
      if (scl === tick) {
        const found = this.scl.shift();
        this.sclLevel = found.level;
        leadScl = found.lead;
      }
      if (sda === tick) {
        const found = this.sda.shift();
        this.sdaLevel = found.level;
        leadSda = found.lead;
      }
      this.writer.putVolts(tick, SCL_BITS[this.sclLevel] | SDA_BITS[this.sdaLevel], leadScl, leadSda, Number.NaN, Number.NaN);
    }
  }

  finish(): void {
    this.drain(Number.POSITIVE_INFINITY);
    this.writer.finish();
  }

  get endTick(): number {
    return Math.max(this.scl.end, this.sda.end);
  }

  warnings(): Warning[] {
    const count = this.scl.backwards + this.sda.backwards;
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
