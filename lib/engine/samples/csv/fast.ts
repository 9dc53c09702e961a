// In: whole rows of a plain body. Out: the same edges as the scanner's, for the two commonest shapes: a time and one-byte
// levels, and a time and two voltages. Each row is checked byte by byte; the first one that is not exactly of the shape is
// left to the scanner, which hands back after it. Nothing here decides anything that Rows or the takers would not.

import type { Body } from "./body";
import { POWERS } from "./cell";
import type { LineSource } from "./lines";
import type { Rows } from "./rows";
import type { FastPath, Scanner } from "./scanner";
import type { LevelTaker } from "./takers";

const CR = 13;
const LF = 10;

/** Ticks per unit of the last digit of times with `places` decimals; NaN where that is not a whole number. */
function multiplierOf(power: number, places: number): number {
  return power - places >= 0 && power - places <= 22 ? POWERS[power - places] : Number.NaN;
}

export function shapeAllows(body: Body): boolean {
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
  readonly worth = true;
  begin(): void {}
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
    const { delimiter, decimal, toScl, toSda, toEnd, rows, taker } = this;
    const { gap } = rows;
    const timePower = this.body.axis.clock.power;
    const three = toEnd === 4;
    let places = -1;
    let multiplier = Number.NaN;
    let last = rows.lastTick;
    let before = rows.beforeTick;
    let limit = rows.limit;
    let key = taker.lines === 3 ? 0x3131 : -1;
    let p = from;
    let read = 0;
    while (p < to) {
      const start = p;
      let digit = bytes[p] - 48;
      let negative = false;
      if (digit === -3) {
        negative = true;
        p += 1;
        digit = bytes[p] - 48;
      }
      let whole = 0;
      const first = p;
      while (digit >= 0 && digit <= 9) {
        whole = (Math.imul(whole, 10) + digit) | 0;
        p += 1;
        digit = bytes[p] - 48;
      }
      const wholeEnd = p;
      let part = 0;
      if (bytes[p] === decimal) {
        p += 1;
        digit = bytes[p] - 48;
        while (digit >= 0 && digit <= 9) {
          part = (Math.imul(part, 10) + digit) | 0;
          p += 1;
          digit = bytes[p] - 48;
        }
      }
      const found = p === wholeEnd ? 0 : p - wholeEnd - 1;
      if (found !== places) {
        places = found;
        multiplier = found > 9 ? Number.NaN : multiplierOf(timePower, found);
      }
      let tick = (whole * POWERS[places] + part) * multiplier;
      if (negative) tick = -tick;
      // NaN fails as well: a shape whose ticks are not whole numbers goes to the scanner.
      if (!(tick > last && tick < limit) || wholeEnd === first || wholeEnd - first > 9)
        return this.leave(scanner, start, read, before, last, limit);
      const end = p + toEnd;
      const ending = bytes[end];
      if (ending !== LF && !(ending === CR && bytes[end + 1] === LF && end + 1 < to))
        return this.leave(scanner, start, read, before, last, limit);
      const scl = bytes[p + toScl];
      const sda = bytes[p + toSda];
      const plain = three
        ? bytes[p] === delimiter && bytes[p + 2] === delimiter && ((scl | sda) & 0xfe) === 48 && (scl & sda & 48) === 48
        : this.others(bytes, p);
      if (!plain) return this.leave(scanner, start, read, before, last, limit);
      p = ending === LF ? end + 1 : end + 2;
      const now = (scl << 8) | sda;
      if (now !== key) {
        key = now;
        const lines = (scl & 1) | ((sda & 1) << 1);
        if (lines !== taker.lines) {
          taker.lines = lines;
          taker.writer.put(tick, lines);
        }
      }
      before = last;
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    return this.leave(scanner, p, read, before, last, limit);
  }

  /** The cells after a time that ends at `p`, for a row of any width. */
  private others(bytes: Uint8Array, p: number): boolean {
    for (let at = p; at < p + this.toEnd; at += 2) {
      if (bytes[at] !== this.delimiter || (bytes[at + 1] & 0xfe) !== 48) return false;
    }
    return true;
  }

  private leave(scanner: Scanner, at: number, read: number, before: number, last: number, limit: number): number {
    if (read > 0) {
      this.rows.beforeTick = before;
      this.rows.lastTick = last;
      this.rows.limit = limit;
    }
    return handBack(scanner, this.rows, at, read);
  }
}

/** Brings the scanner and the rows' count up to where a fast path stopped after `read` rows. */
export function handBack(scanner: Scanner, rows: Rows, at: number, read: number): number {
  if (read > 0) {
    rows.count += read;
    scanner.line += read;
    scanner.rowNumber += read;
    rows.lastLine = scanner.line - 1;
  }
  return at;
}
