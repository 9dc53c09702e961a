// In: whole rows of a plain body. Out: the same edges as the scanner's, for the two commonest shapes: a time and one-byte
// levels, and a time and two voltages. Each row is checked byte by byte; the first one that is not exactly of the shape is
// left to the scanner, which hands back after it. Nothing here decides anything that Rows or the takers would not.

import type { Body } from "./body";
import { POWERS, scaled } from "./cell";
import { number, readDigits } from "./digits";
import type { LineSource, Selection } from "./lines";
import type { Rows } from "./rows";
import type { FastPath, Scanner } from "./scanner";
import type { LevelTaker, VoltTaker } from "./takers";

const CR = 13;
const LF = 10;

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
        return this.leave(scanner, start, read, last, limit);
      const end = p + toEnd;
      const ending = bytes[end];
      if (ending !== LF && !(ending === CR && bytes[end + 1] === LF && end + 1 < to))
        return this.leave(scanner, start, read, last, limit);
      const scl = bytes[p + toScl];
      const sda = bytes[p + toSda];
      const plain = three
        ? bytes[p] === delimiter && bytes[p + 2] === delimiter && ((scl | sda) & 0xfe) === 48 && (scl & sda & 48) === 48
        : this.others(bytes, p);
      if (!plain) return this.leave(scanner, start, read, last, limit);
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
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    return this.leave(scanner, p, read, last, limit);
  }

  /** The cells after a time that ends at `p`, for a row of any width. */
  private others(bytes: Uint8Array, p: number): boolean {
    for (let at = p; at < p + this.toEnd; at += 2) {
      if (bytes[at] !== this.delimiter || (bytes[at + 1] & 0xfe) !== 48) return false;
    }
    return true;
  }

  private leave(scanner: Scanner, at: number, read: number, last: number, limit: number): number {
    return handBack(scanner, this.rows, at, read, last, limit);
  }
}

/** Brings the scanner and the rows up to where a fast path stopped. */
function handBack(scanner: Scanner, rows: Rows, at: number, read: number, last: number, limit: number): number {
  if (read > 0) {
    rows.count += read;
    rows.lastTick = last;
    rows.limit = limit;
    scanner.line += read;
    scanner.rowNumber += read;
    rows.lastLine = scanner.line - 1;
  }
  return at;
}

/** Rows like "0.0000125,3.301,0.118" or with exponents: the time, then the two lines in volts, and nothing else. */
export class FastVolts implements FastPath {
  private readonly delimiter: number;
  private readonly decimal: number;
  private readonly sclFirst: boolean;
  private readonly aSlot: number;
  private readonly bSlot: number;
  private readonly power: number;
  private readonly firstPower: number;
  private readonly secondPower: number;

  private constructor(
    body: Body,
    selection: Selection,
    scl: LineSource,
    private readonly rows: Rows,
    private readonly taker: VoltTaker,
  ) {
    this.delimiter = body.layout.dialect.delimiter.charCodeAt(0);
    this.decimal = body.layout.dialect.decimal.charCodeAt(0);
    this.sclFirst = scl.column.index === 1;
    this.aSlot = this.sclFirst ? taker.sclSlot : taker.sdaSlot;
    this.bSlot = this.sclFirst ? taker.sdaSlot : taker.sclSlot;
    this.power = body.axis.clock.power;
    this.firstPower = selection.powers[1];
    this.secondPower = selection.powers[2];
  }

  static for(body: Body, selection: Selection, scl: LineSource, sda: LineSource, rows: Rows, taker: VoltTaker): FastVolts | null {
    const pair =
      body.layout.width === 3 && scl.bit < 0 && sda.bit < 0 && scl.channel.kind !== "digital" && sda.channel.kind !== "digital";
    return shapeAllows(body) && pair && taker.taps.length === 0 ? new FastVolts(body, selection, scl, rows, taker) : null;
  }

  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number {
    const { rows, taker } = this;
    const { gap } = rows;
    const a = this.sclFirst ? taker.scl : taker.sda;
    const b = this.sclFirst ? taker.sda : taker.scl;
    let last = rows.lastTick;
    let limit = rows.limit;
    // A quiet sample lies within these and changes nothing but the means.
    let aLeast = a.quietLeast();
    let aMost = a.quietMost();
    let bLeast = b.quietLeast();
    let bMost = b.quietMost();
    let va = a.previous;
    let vb = b.previous;
    // Means are gathered here and written back before anyone else looks; both rings turn together.
    const aRing = a.ring;
    const bRing = b.ring;
    const turn = aRing.length;
    let at = a.at;
    let aSum = a.sum;
    let bSum = b.sum;
    let aCount = a.count;
    let bCount = b.count;
    let p = from;
    let read = 0;
    while (p < to) {
      const next = this.row(bytes, p, to);
      const tick = this.found[0];
      if (next < 0 || !(tick > last && tick < limit)) break;
      p = next;
      const x = this.found[1];
      const y = this.found[2];
      if (x >= aLeast && x <= aMost && y >= bLeast && y <= bMost) {
        const aMoved = x - aRing[at];
        const bMoved = y - bRing[at];
        aRing[at] = x;
        bRing[at] = y;
        at = at + 1 === turn ? 0 : at + 1;
        if (aMoved <= a.settle && aMoved >= -a.settle) {
          aSum += x;
          aCount += 1;
        }
        if (bMoved <= b.settle && bMoved >= -b.settle) {
          bSum += y;
          bCount += 1;
        }
      } else {
        a.seen(last, va, at, aSum, aCount);
        b.seen(last, vb, at, bSum, bCount);
        taker.values[this.aSlot] = x;
        taker.values[this.bSlot] = y;
        taker.take(tick, false);
        at = a.at;
        aSum = a.sum;
        bSum = b.sum;
        aCount = a.count;
        bCount = b.count;
        aLeast = a.quietLeast();
        aMost = a.quietMost();
        bLeast = b.quietLeast();
        bMost = b.quietMost();
      }
      va = x;
      vb = y;
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    if (read > 0) {
      a.seen(last, va, at, aSum, aCount);
      b.seen(last, vb, at, bSum, bCount);
    }
    return handBack(scanner, rows, p, read, last, limit);
  }

  /** Instant and readings of the latest row. */
  private readonly found = new Float64Array(3);
  private exponent = Number.NaN;
  private multiplier = 0;

  /** Reads one row into `found`; returns the position after it, or -1 where it is not of the shape. */
  private row(bytes: Uint8Array, from: number, to: number): number {
    const { found, delimiter } = this;
    let p = readDigits(bytes, from, this.decimal);
    if (p < 0 || bytes[p] !== delimiter) return -1;
    if (number[1] !== this.exponent) {
      this.exponent = number[1];
      this.multiplier = multiplierOf(this.power, -this.exponent);
    }
    found[0] = number[0] * this.multiplier;
    found[1] = this.cell(bytes, p + 1, this.firstPower);
    p = this.end;
    if (p < 0 || bytes[p] !== delimiter) return -1;
    found[2] = this.cell(bytes, p + 1, this.secondPower);
    p = this.end;
    const ending = p < 0 ? 0 : bytes[p];
    if (ending === LF) return p + 1;
    return ending === CR && p + 1 < to && bytes[p + 1] === LF ? p + 2 : -1;
  }

  /** Where the latest cell ended; -1 where it is no plain number. */
  private end = 0;
  /** Cells have had few digits and no exponent so far. */
  private short = true;

  /** A reading such as "-0.118" or "1.18000E-01", in volts. Few digits are gathered in one 32-bit integer. */
  private cell(bytes: Uint8Array, from: number, power: number): number {
    if (!this.short) return this.longCell(bytes, from, power);
    const negative = bytes[from] === 45;
    let p = negative ? from + 1 : from;
    const first = p;
    let mantissa = 0;
    let digit = bytes[p] - 48;
    while (digit >= 0 && digit <= 9) {
      mantissa = (Math.imul(mantissa, 10) + digit) | 0;
      digit = bytes[++p] - 48;
    }
    const point = p;
    let digits = p - first;
    if (bytes[p] === this.decimal) {
      digit = bytes[++p] - 48;
      while (digit >= 0 && digit <= 9) {
        mantissa = (Math.imul(mantissa, 10) + digit) | 0;
        digit = bytes[++p] - 48;
      }
      digits = p - first - 1;
    }
    const places = p === point ? 0 : p - point - 1;
    if (power === 0 && digits > 0 && digits <= 9 && (digit < 0 || digit > 9) && digit !== 21 && digit !== 53) {
      this.end = p;
      return negative ? -mantissa / POWERS[places] : mantissa / POWERS[places];
    }
    this.short = false;
    return this.longCell(bytes, from, power);
  }

  private longCell(bytes: Uint8Array, from: number, power: number): number {
    this.end = readDigits(bytes, from, this.decimal);
    return unscaled(number[0], number[1] + power);
  }
}

function unscaled(mantissa: number, exponent: number): number {
  return exponent <= 0 && exponent >= -22 ? mantissa / POWERS[-exponent] : scaled(mantissa, exponent);
}
