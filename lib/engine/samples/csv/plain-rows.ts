// In: whole rows of a time and two readings, in plain decimals. Out: the same blocks as the scanner's own. A row is read by the
// form of the row before it, all decimals of a cell at once and every byte checked; the first one of another form is left to
// the scanner.

import type { RowBlock } from "./block";
import { INSTANT, type ScanPlan, VALUE } from "./plan";
import { lastDigits, lastFour, ROW_ROOM, RowForm } from "./row-form";
import type { FastPath, Scanner } from "./scanner";

const CR = 13;
const LF = 10;
const MINUS = 45;

/** Digits before the mark that stay exact in 32 bits, and with all that follow in a double. */
const MOST_TIME = 6;
const MOST_WHOLE = 7;

export class PlainRows implements FastPath {
  private readonly form: RowForm;
  private readonly delimiter: number;
  private readonly decimal: number;
  private readonly firstSlot: number;
  private readonly secondSlot: number;

  private constructor(plan: ScanPlan) {
    this.delimiter = plan.dialect.delimiter.charCodeAt(0);
    this.decimal = plan.dialect.decimal.charCodeAt(0);
    this.form = new RowForm(plan.powers, plan.clock.power, this.delimiter, this.decimal);
    this.firstSlot = plan.slots[1];
    this.secondSlot = plan.slots[2];
  }

  static for(plan: ScanPlan): PlainRows | null {
    const { modes, clock, dialect } = plan;
    const shape = plan.width === 3 && modes[0] === INSTANT && modes[1] === VALUE && modes[2] === VALUE;
    const timed = clock.factor === null && clock.start === 0;
    return shape && timed && dialect.delimiter !== " " ? new PlainRows(plan) : null;
  }

  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number {
    const room = to - ROW_ROOM;
    if (from < 8 || from >= room || !this.form.learn(bytes, from)) return from;
    const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    const { block } = scanner;
    let p = from;
    for (;;) {
      p = this.read(bytes, view, p, room, block);
      const full = block.length === block.capacity;
      scanner.flush();
      if (!full) return p;
    }
  }

  /** Fills the block. Everything stays in locals: calls and fields cost more here than the digits do. */
  private read(bytes: Uint8Array, view: DataView, from: number, room: number, block: RowBlock): number {
    const { form, delimiter, decimal, firstSlot, secondSlot } = this;
    const { ending, multiplier, timeScale, firstScale, secondScale, firstDivisor, secondDivisor, single } = form;
    const [timeHigh, firstHigh, secondHigh] = form.high;
    const [timeLow, firstLow, secondLow] = form.low;
    const [timePlaces, firstPlaces, secondPlaces] = form.packed;
    const wide = firstPlaces > 4 || secondPlaces > 4;
    const { ticks, readings, capacity, width } = block;
    let n = 0;
    let start = from;
    for (let p = from; n < capacity && p < room; start = p, n += 1) {
      let negative = bytes[p] === MINUS;
      let first = negative ? ++p : p;
      let whole = 0;
      for (let digit = bytes[p] - 48; digit >= 0 && digit <= 9; digit = bytes[++p] - 48)
        whole = (Math.imul(whole, 10) + digit) | 0;
      if (bytes[p] !== decimal || p === first || p - first > MOST_TIME) break;
      if (single) {
        const digit = bytes[++p] - 48;
        if (digit < 0 || digit > 9) break;
        whole = (Math.imul(whole, 10) + digit) | 0;
      }
      p += timePlaces + 1;
      let part = lastDigits(view, p, timeHigh, timeLow);
      if (part < 0 || bytes[p] !== delimiter) break;
      const time = (whole * timeScale + part) * multiplier;
      ticks[n] = negative ? 0 - time : time;
      p += 1;
      negative = bytes[p] === MINUS;
      first = negative ? ++p : p;
      whole = 0;
      for (let digit = bytes[p] - 48; digit >= 0 && digit <= 9; digit = bytes[++p] - 48)
        whole = (Math.imul(whole, 10) + digit) | 0;
      if (bytes[p] !== decimal || p === first || p - first > MOST_WHOLE) break;
      p += firstPlaces + 1;
      part = wide ? lastDigits(view, p, firstHigh, firstLow) : lastFour(view, p, firstLow);
      if (part < 0 || bytes[p] !== delimiter) break;
      let digits = whole * firstScale + part;
      readings[n * width + firstSlot] = (negative ? -digits : digits) / firstDivisor;
      p += 1;
      negative = bytes[p] === MINUS;
      first = negative ? ++p : p;
      whole = 0;
      for (let digit = bytes[p] - 48; digit >= 0 && digit <= 9; digit = bytes[++p] - 48)
        whole = (Math.imul(whole, 10) + digit) | 0;
      if (bytes[p] !== decimal || p === first || p - first > MOST_WHOLE) break;
      p += secondPlaces + 1;
      part = wide ? lastDigits(view, p, secondHigh, secondLow) : lastFour(view, p, secondLow);
      if (part < 0 || bytes[p] !== ending || (ending === CR && bytes[++p] !== LF)) break;
      digits = whole * secondScale + part;
      readings[n * width + secondSlot] = (negative ? -digits : digits) / secondDivisor;
      p += 1;
    }
    block.length = n;
    return start;
  }
}
