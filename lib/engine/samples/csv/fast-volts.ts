// In: whole rows of a plain body, a time and two voltages. Out: the same edges as the scanner's. A row is read by the form
// of the row before it, every byte checked; the first one of another form is left to the scanner, which hands back after it.

import type { Body } from "./body";
import { POWERS } from "./cell";
import type { Comparator } from "./comparator";
import { exponent, readExponent } from "./digits";
import { handBack, shapeAllows } from "./fast";
import type { LineSource, Selection } from "./lines";
import { lastDigits, lastFour, ROW_ROOM, RowForm } from "./row-form";
import type { Rows } from "./rows";
import type { FastPath, Scanner } from "./scanner";
import type { VoltTaker } from "./takers";

const CR = 13;
const LF = 10;
const MINUS = 45;

/** Digits before the mark that stay exact in 32 bits with all that follow. */
const MOST_TIME = 6;
const MOST_WHOLE = 7;
/** Rows of another form than the one before, after which it is asked whether forms hold long enough to be worth it. */
const MISSES = 64;
/** Rows that a form must hold on average. */
const WORTH_ROWS = 4;

/** Rows like "0.0000125,3.301,0.118" or with exponents: the time, then the two lines in volts, and nothing else. */
export class FastVolts implements FastPath {
  private readonly delimiter: number;
  private readonly decimal: number;
  private readonly form: RowForm;
  /** Power of ten from the times' unit to ticks. */
  private readonly power: number;
  /** Instant and readings of the latest row. */
  private readonly found = new Float64Array(3);
  private readonly sclFirst: boolean;
  /** The lines in the file's order. */
  private readonly a: Comparator;
  private readonly b: Comparator;
  private misses = 0;
  private taken = 0;
  /** Rows that the latest `scan` took. */
  private read = 0;

  private constructor(
    body: Body,
    selection: Selection,
    scl: LineSource,
    private readonly rows: Rows,
    private readonly taker: VoltTaker,
  ) {
    this.delimiter = body.layout.dialect.delimiter.charCodeAt(0);
    this.decimal = body.layout.dialect.decimal.charCodeAt(0);
    this.form = new RowForm(selection.powers, body.axis.clock.power, this.delimiter, this.decimal);
    this.power = body.axis.clock.power;
    this.sclFirst = scl.column.index === 1;
    this.a = this.sclFirst ? taker.scl : taker.sda;
    this.b = this.sclFirst ? taker.sda : taker.scl;
  }

  static for(body: Body, selection: Selection, scl: LineSource, sda: LineSource, rows: Rows, taker: VoltTaker): FastVolts | null {
    const pair =
      body.layout.width === 3 && scl.bit < 0 && sda.bit < 0 && scl.channel.kind !== "digital" && sda.channel.kind !== "digital";
    return shapeAllows(body) && pair && taker.taps.length === 0 ? new FastVolts(body, selection, scl, rows, taker) : null;
  }

  get worth(): boolean {
    return this.misses < MISSES || this.taken > this.misses * WORTH_ROWS;
  }

  begin(): void {
    this.misses = 0;
    this.taken = 0;
  }

  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number {
    const room = to - ROW_ROOM;
    if (from < 8 || from >= room) return from;
    this.misses += 1;
    this.read = 0;
    if (!this.form.learn(bytes, from)) return from;
    const p = this.form.plain ? this.plainRows(bytes, scanner.view, from, room) : this.formRows(bytes, scanner.view, from, room);
    this.taken += this.read;
    return handBack(scanner, this.rows, p, this.read);
  }

  /** Rows without exponents. Everything stays in locals: calls and fields cost more here than the digits do. */
  private plainRows(bytes: Uint8Array, view: DataView, from: number, room: number): number {
    const { rows, a, b, form, delimiter, decimal } = this;
    const { gap } = rows;
    const { ending, multiplier, timeScale, firstScale, secondScale, firstDivisor, secondDivisor } = form;
    const [timeHigh, firstHigh, secondHigh] = form.high;
    const [timeLow, firstLow, secondLow] = form.low;
    const [timePlaces, firstPlaces, secondPlaces] = form.packed;
    const single = form.single[0] > 0;
    const wide = firstPlaces > 4 || secondPlaces > 4;
    let last = rows.lastTick;
    let limit = rows.limit;
    let x = a.previous;
    let y = b.previous;
    let p = from;
    let start = from;
    let read = 0;
    for (; p < room; start = p) {
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
      const time = (whole * timeScale + part) * multiplier;
      const tick = negative ? 0 - time : time;
      if (part < 0 || bytes[p] !== delimiter || !(tick > last && tick < limit)) break;
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
      const v = (negative ? -(whole * firstScale + part) : whole * firstScale + part) / firstDivisor;
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
      const w = (negative ? -(whole * secondScale + part) : whole * secondScale + part) / secondDivisor;
      p += 1;
      if (a.isQuiet(v) && b.isQuiet(w)) {
        a.add(v);
        b.add(w);
      } else this.loud(tick, v, w, last, x, y);
      x = v;
      y = w;
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    this.leave(last, limit, x, y, read);
    return start;
  }

  /** Rows of any form. */
  private formRows(bytes: Uint8Array, view: DataView, from: number, room: number): number {
    const { rows, a, b, found } = this;
    const { gap } = rows;
    let last = rows.lastTick;
    let limit = rows.limit;
    let x = a.previous;
    let y = b.previous;
    let p = from;
    let read = 0;
    while (p < room) {
      const next = this.row(bytes, view, p);
      const tick = found[0];
      if (next < 0 || !(tick > last && tick < limit)) break;
      p = next;
      const v = found[1];
      const w = found[2];
      if (a.isQuiet(v) && b.isQuiet(w)) {
        a.add(v);
        b.add(w);
      } else this.loud(tick, v, w, last, x, y);
      x = v;
      y = w;
      last = tick;
      limit = tick + gap;
      read += 1;
    }
    this.leave(last, limit, x, y, read);
    return p;
  }

  private leave(last: number, limit: number, x: number, y: number, read: number): void {
    this.read = read;
    if (read === 0) return;
    this.rows.lastTick = last;
    this.rows.limit = limit;
    this.a.seen(last, x);
    this.b.seen(last, y);
  }

  /** Reads a row of the form into `found`; returns the position after it, or -1 where it has another form. */
  private row(bytes: Uint8Array, view: DataView, from: number): number {
    const { form, decimal, found } = this;
    const n = form.packed[0];
    const negative = bytes[from] === 45;
    let p = negative ? from + 1 : from;
    const first = p;
    let whole = 0;
    let digit = bytes[p] - 48;
    while (digit >= 0 && digit <= 9) {
      whole = (Math.imul(whole, 10) + digit) | 0;
      digit = bytes[++p] - 48;
    }
    if (p === first || p - first > form.whole[0]) return -1;
    let part = 0;
    if (n > 0) {
      if (bytes[p] !== decimal) return -1;
      for (let i = form.single[0]; i > 0; i -= 1) {
        digit = bytes[++p] - 48;
        if (digit < 0 || digit > 9) return -1;
        whole = (Math.imul(whole, 10) + digit) | 0;
      }
      p += n + 1;
      part = lastDigits(view, p, form.high[0], form.low[0]);
    }
    let e = this.power - form.places[0];
    if ((bytes[p] | 32) === 101) {
      p = readExponent(bytes, p);
      e += exponent[0];
    }
    if (part < 0 || p < 0 || bytes[p] !== this.delimiter || e > 22 || e < -22) return -1;
    const m = whole * POWERS[n] + part;
    const tick = e < 0 ? Math.round(m / POWERS[-e]) : m * POWERS[e];
    found[0] = negative ? 0 - tick : tick;
    p = this.reading(bytes, view, p + 1, 1);
    if (p < 0 || bytes[p] !== this.delimiter) return -1;
    p = this.reading(bytes, view, p + 1, 2);
    if (p < 0 || bytes[p] !== form.ending) return -1;
    return form.ending === LF ? p + 1 : bytes[p + 1] === LF ? p + 2 : -1;
  }

  /** Reads a cell such as "-0.118" or "1.18000E-01" into `found`, in volts; returns its end, or -1. */
  private reading(bytes: Uint8Array, view: DataView, from: number, c: number): number {
    const { form } = this;
    const n = form.packed[c];
    const negative = bytes[from] === 45;
    let p = negative ? from + 1 : from;
    const first = p;
    let whole = 0;
    let digit = bytes[p] - 48;
    while (digit >= 0 && digit <= 9) {
      whole = (Math.imul(whole, 10) + digit) | 0;
      digit = bytes[++p] - 48;
    }
    if (p === first || p - first > form.whole[c]) return -1;
    let part = 0;
    if (n > 0) {
      if (bytes[p] !== this.decimal) return -1;
      p += n + 1;
      part = n <= 4 ? lastFour(view, p, form.low[c]) : lastDigits(view, p, form.high[c], form.low[c]);
      if (part < 0) return -1;
    }
    let e = form.divisors[c];
    if ((bytes[p] | 32) === 101) {
      p = readExponent(bytes, p);
      e -= exponent[0];
    }
    if (e < 0 || e > 22) return -1;
    const v = (whole * POWERS[n] + part) / POWERS[e];
    this.found[c] = negative ? -v : v;
    return p;
  }

  /** A sample that is more than part of a mean: it goes the way of the scanner's rows. */
  private loud(tick: number, v: number, w: number, last: number, x: number, y: number): void {
    const { taker, sclFirst } = this;
    this.a.seen(last, x);
    this.b.seen(last, y);
    taker.values[taker.sclSlot] = sclFirst ? v : w;
    taker.values[taker.sdaSlot] = sclFirst ? w : v;
    taker.take(tick, false);
  }
}
