// In: whole rows of a plain body. Out: the same edges as the scanner's, for the commonest shape: a time and one-byte levels.
// A row is read by the form of the row before it, all digits at once and every byte checked; the first one of another form is
// left to the scanner, which hands back after it. Nothing here decides anything that Rows or the takers would not.

import type { Body } from "./body";
import { POWERS } from "./cell";
import type { LineSource } from "./lines";
import { lastDigits } from "./row-form";
import type { Rows } from "./rows";
import type { FastPath, Scanner } from "./scanner";
import type { LevelTaker } from "./takers";
import { TimeForm } from "./time-form";

const CR = 13;
const LF = 10;
const MINUS = 45;
/** Bytes before the end of digits that are loaded with them. */
const EIGHT = 8;

/** Ticks per unit of the last digit of times with `places` decimals; NaN where that is not a whole number. */
function multiplierOf(power: number, places: number): number {
  return power - places >= 0 && power - places <= 22 ? POWERS[power - places] : Number.NaN;
}

function shapeAllows(body: Body): boolean {
  const { axis, layout } = body;
  return (
    axis.clock.column === 0 &&
    axis.clock.factor === null &&
    axis.clock.start === 0 &&
    !axis.pace.rebuilt &&
    layout.dialect.delimiter !== " "
  );
}

/** Rows like "0.0000125,1,0": the time first, every other column one byte 0 or 1. */
export class FastLevels implements FastPath {
  private readonly form = new TimeForm();
  private readonly delimiter: number;
  private readonly decimal: number;
  /** Distance from the end of the time to the bytes of SCL, SDA and the row's end. */
  private readonly toScl: number;
  private readonly toSda: number;
  private readonly toEnd: number;

  private constructor(
    private readonly body: Body,
    scl: LineSource,
    sda: LineSource,
    private readonly rows: Rows,
    private readonly taker: LevelTaker,
  ) {
    this.delimiter = body.layout.dialect.delimiter.charCodeAt(0);
    this.decimal = body.layout.dialect.decimal.charCodeAt(0);
    this.toScl = 2 * scl.column.index - 1;
    this.toSda = 2 * sda.column.index - 1;
    this.toEnd = 2 * (body.layout.width - 1);
  }

  static for(body: Body, scl: LineSource, sda: LineSource, rows: Rows, taker: LevelTaker): FastLevels | null {
    const plain = body.layout.columns.every((column) => column.index === 0 || column.role === "digital");
    return shapeAllows(body) && plain && taker.taps.length === 0 ? new FastLevels(body, scl, sda, rows, taker) : null;
  }

  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number {
    const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    let p = from;
    while (p >= EIGHT && this.rows.regular && this.form.learn(bytes, p, this.decimal)) {
      const next = this.read(bytes, view, p, to, scanner);
      if (next === p) break;
      p = next;
    }
    return p;
  }

  /** Rows of one form, all of one length. Everything stays in locals: fields cost more here than the digits do. */
  private read(bytes: Uint8Array, view: DataView, from: number, to: number, scanner: Scanner): number {
    const { delimiter, decimal, form, rows, taker, toScl, toSda } = this;
    const { sign, headEnd, middleEnd, tailEnd, marked, middle, middleScale, tailScale } = form;
    const { headHigh, headLow, middleHigh, middleLow, tailHigh, tailLow } = form;
    const { gap } = rows;
    const { changeTicks, changeLines } = taker;
    const multiplier = multiplierOf(this.body.axis.clock.power, form.places);
    const three = this.toEnd === 4;
    const toEnd = sign + tailEnd + this.toEnd;
    const ending = bytes[from + toEnd];
    const length = ending === CR ? toEnd + 2 : toEnd + 1;
    let last = rows.lastTick;
    let before = rows.beforeTick;
    let limit = rows.limit;
    let { lines } = taker;
    let key = lines === 3 ? 0x3131 : -1;
    let changes = 0;
    let read = 0;
    let p = from;
    for (; p + length <= to; p += length) {
      const first = p + sign;
      const head = lastDigits(view, first + headEnd, headHigh, headLow);
      const tail = lastDigits(view, first + tailEnd, tailHigh, tailLow);
      let digits = head;
      if (middle) {
        const part = lastDigits(view, first + middleEnd, middleHigh, middleLow);
        if (part < 0) break;
        digits = digits * middleScale + part;
      }
      digits = (digits * tailScale + tail) * multiplier;
      const tick = sign === 1 ? -digits : digits;
      // NaN fails as well: a shape whose ticks are not whole numbers goes to the scanner.
      if (head < 0 || tail < 0 || !(tick > last && tick < limit)) break;
      const at = first + tailEnd;
      if ((marked && bytes[first + headEnd] !== decimal) || (sign === 1 && bytes[p] !== MINUS)) break;
      if (bytes[p + toEnd] !== ending || bytes[p + length - 1] !== LF) break;
      const scl = bytes[at + toScl];
      const sda = bytes[at + toSda];
      const plain = three
        ? bytes[at] === delimiter && bytes[at + 2] === delimiter && ((scl | sda) & 0xfe) === 48 && (scl & sda & 48) === 48
        : this.others(bytes, at);
      if (!plain) break;
      const now = (scl << 8) | sda;
      if (now !== key) {
        key = now;
        const next = (scl & 1) | ((sda & 1) << 1);
        if (next !== lines) {
          if (changes === changeTicks.length) {
            taker.put(changes);
            changes = 0;
          }
          lines = next;
          changeTicks[changes] = tick;
          changeLines[changes] = next;
          changes += 1;
        }
      }
      before = last;
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    taker.put(changes);
    taker.lines = lines;
    if (read > 0) this.leave(scanner, read, before, last, limit);
    return p;
  }

  /** The cells after a time that ends at `p`, for a row of any width. */
  private others(bytes: Uint8Array, p: number): boolean {
    for (let at = p; at < p + this.toEnd; at += 2) {
      if (bytes[at] !== this.delimiter || (bytes[at + 1] & 0xfe) !== 48) return false;
    }
    return true;
  }

  /** Brings the scanner and the judge of the rows up to where this path is. */
  private leave(scanner: Scanner, read: number, before: number, last: number, limit: number): void {
    const { rows } = this;
    rows.beforeTick = before;
    rows.lastTick = last;
    rows.limit = limit;
    rows.count += read;
    scanner.line += read;
    scanner.rowNumber += read;
    rows.lastLine = scanner.line - 1;
  }
}
