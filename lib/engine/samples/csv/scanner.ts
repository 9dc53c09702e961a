// In: chunks of a CSV body, cut anywhere. Out: one call per row with its instant and the wanted cells' values. Bytes
// only: no string is made for a regular row, and instants are exact whole-number mantissas until they are ticks.

import type { AsideReason } from "./aside";
import { BITS, Cell, NUMBER, POWERS, readText, scaled, UNKNOWN } from "./cell";
import { digits, exponent, mantissa, readDigits, readExponent } from "./digits";
import type { RowTarget } from "./rows";
import { type Dialect, splitText } from "./split";

/** What a wanted cell is read as: a level 0/1/2, a number (NaN unknown), or the row's instant. */
export const SKIP = 0;
export const LEVEL = 1;
export const VALUE = 2;
export const INSTANT = 3;

/** Where instants come from. tick = number x 10^power (exact), or number x factor where a factor is given. */
export interface Clockwork {
  /** Column of times or running numbers, or -1: the row's own number counts. */
  readonly column: number;
  readonly power: number;
  readonly factor: number | null;
  /** Added to every instant; for counted rows. */
  readonly start: number;
}

export interface ScanPlan {
  readonly dialect: Dialect;
  readonly width: number;
  /** Cells from here on must be empty. */
  readonly namedWidth: number;
  readonly firstLine: number;
  readonly clock: Clockwork;
  /** Per column: SKIP, LEVEL, VALUE or INSTANT. */
  readonly modes: Uint8Array;
  /** Per column: index in `values`. */
  readonly slots: Int32Array;
  /** Per column: power of ten that takes its numbers to volts; 0 elsewhere. */
  readonly powers: Int32Array;
  readonly values: Float64Array;
}

/** A longer row is no row of readings; it is set aside without being kept. */
const ROW_LIMIT = 1 << 20;

const CR = 13;
const LF = 10;

export interface FastPath {
  /** False while rows are too irregular for it. */
  readonly worth: boolean;
  /** A new chunk begins: irregular rows are behind. */
  begin(): void;
  /** Takes regular rows from `from` on; returns the position of the first row it leaves to the scanner. */
  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number;
}

export class Scanner {
  /** Line of the row at hand, from 1. */
  line = 1;
  /** Rows read since the first row of readings, used or not. */
  rowNumber = 0;
  private carry = new Uint8Array(4096);
  private carried = 0;
  private discarding = false;
  private lastByte = 0;
  private readonly cell = new Cell();
  /** What is wrong with the row at hand, and its instant. */
  private odd: AsideReason | "" = "";
  private mantissa = 0;
  private exponent = 0;
  private exponentNow = Number.NaN;
  private multiplier = 1;
  private divisor = 1;
  private readonly delimiter: number;
  private readonly decimal: number;
  private readonly spaces: boolean;
  /** The bytes being scanned. */
  view: DataView = new DataView(this.carry.buffer);

  constructor(
    readonly plan: ScanPlan,
    private readonly target: RowTarget,
    private readonly fast: FastPath | null,
    private readonly ready: () => boolean,
  ) {
    this.delimiter = plan.dialect.delimiter.charCodeAt(0);
    this.decimal = plan.dialect.decimal.charCodeAt(0);
    this.spaces = plan.dialect.delimiter === " ";
  }

  push(input: Uint8Array): void {
    const chunk = this.spaces ? input.map((byte) => (byte === 9 ? 32 : byte)) : input;
    let from = 0;
    if (this.carried > 0 || this.discarding) {
      while (from < chunk.length && chunk[from] !== LF && chunk[from] !== CR) from += 1;
      if (from === chunk.length) {
        this.keep(chunk, 0, chunk.length);
        return;
      }
      from += 1;
      this.keep(chunk, 0, from);
      this.region(this.carry, 0, this.endCarry());
    }
    let end = chunk.length;
    while (end > from && chunk[end - 1] !== LF && chunk[end - 1] !== CR) end -= 1;
    if (end > from) this.region(chunk, from, end);
    if (end < chunk.length) this.keep(chunk, end, chunk.length);
  }

  /** The last row may lack its line end (RFC 4180 section 2, rule 2). */
  finish(): void {
    if (this.carried > 0 || this.discarding) {
      this.keep(new Uint8Array([LF]), 0, 1);
      this.region(this.carry, 0, this.endCarry());
    }
  }

  private keep(bytes: Uint8Array, from: number, to: number): void {
    if (this.discarding || this.carried + to - from > ROW_LIMIT) {
      this.discarding = true;
      return;
    }
    if (this.carried + to - from > this.carry.length) {
      const larger = new Uint8Array(Math.max(this.carry.length * 2, this.carried + to - from));
      larger.set(this.carry.subarray(0, this.carried));
      this.carry = larger;
    }
    this.carry.set(bytes.subarray(from, to), this.carried);
    this.carried += to - from;
  }

  /** Length of the row in `carry`; a row over the limit becomes one that cannot be read. */
  private endCarry(): number {
    if (this.discarding) {
      this.discarding = false;
      this.carry[0] = 33;
      this.carry[1] = LF;
      this.carried = 2;
    }
    const length = this.carried;
    this.carried = 0;
    return length;
  }

  /** Whole rows. */
  private region(bytes: Uint8Array, from: number, to: number): void {
    this.view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    this.fast?.begin();
    let p = from;
    if (bytes[p] === LF && this.lastByte === CR) p += 1;
    while (p < to && this.line < this.plan.firstLine) p = this.skipLine(bytes, p, to);
    while (p < to) {
      if (this.fast?.worth && this.ready()) {
        p = this.fast.scan(bytes, p, to, this);
        if (p < to) p = this.scan(bytes, p, to, 1);
      } else p = this.scan(bytes, p, to, this.fast?.worth ? 1 : Number.POSITIVE_INFINITY);
    }
    this.lastByte = bytes[to - 1];
  }

  private skipLine(bytes: Uint8Array, from: number, to: number): number {
    let p = from;
    while (bytes[p] !== LF && bytes[p] !== CR) p += 1;
    this.line += 1;
    return bytes[p] === CR && p + 1 < to && bytes[p + 1] === LF ? p + 2 : p + 1;
  }

  /** Reads up to `limit` rows; returns the position after them. */
  private scan(bytes: Uint8Array, from: number, to: number, limit: number): number {
    const { modes, slots, values, width, namedWidth } = this.plan;
    const { delimiter, spaces } = this;
    let left = limit;
    let p = from;
    while (p < to && left > 0) {
      if (spaces) while (bytes[p] === 32) p += 1;
      const start = p;
      let b = bytes[p];
      if (b === LF || b === CR) {
        this.line += 1;
        p += b === CR && p + 1 < to && bytes[p + 1] === LF ? 2 : 1;
        continue;
      }
      let column = 0;
      this.odd = "";
      for (;;) {
        const mode = column < width ? modes[column] : SKIP;
        if (b === 32 && mode !== SKIP) {
          while (bytes[p] === 32) p += 1;
          b = bytes[p];
        }
        if (mode === LEVEL) {
          const next = bytes[p + 1];
          if ((b & 0xfe) === 48 && (next === delimiter || next === LF || next === CR)) {
            values[slots[column]] = b - 48;
            p += 1;
            b = next;
          } else {
            p = this.slowCell(bytes, p);
            b = bytes[p];
            const level = this.cell.level();
            if (level >= 0) values[slots[column]] = level;
            else if (this.odd === "") this.odd = "cell";
          }
        } else if (mode === SKIP) {
          const cellStart = p;
          while (b !== delimiter && b !== LF && b !== CR) {
            p += 1;
            b = bytes[p];
          }
          if (column >= namedWidth && p > cellStart && !blank(bytes, cellStart, p)) this.odd = "width";
        } else {
          p = this.numberCell(bytes, p, column, mode);
          b = bytes[p];
        }
        column += 1;
        if (b !== delimiter) break;
        p += 1;
        b = bytes[p];
        if (spaces) {
          while (b === 32) {
            p += 1;
            b = bytes[p];
          }
          if (b === LF || b === CR) break;
        }
      }
      const end = p;
      p += b === CR && p + 1 < to && bytes[p + 1] === LF ? 2 : 1;
      if (column < width) this.odd = "width";
      if (this.odd !== "") this.oddRow(bytes, start, end, this.odd);
      else this.target.row(this.tick(this.mantissa, this.exponent), this.line);
      this.line += 1;
      this.rowNumber += 1;
      left -= 1;
    }
    return p;
  }

  /** Reads a number that is wanted, as the row's instant or as a value; returns the position of the cell's end. */
  private numberCell(bytes: Uint8Array, from: number, column: number, mode: number): number {
    let p = readDigits(bytes, from, this.decimal);
    let e = -digits[2];
    if (p > 0 && (bytes[p] | 32) === 101) {
      p = readExponent(bytes, p);
      e += exponent[0];
    }
    const b = p < 0 ? 0 : bytes[p];
    if (b !== this.delimiter && b !== LF && b !== CR) return this.wordCell(bytes, from, column, mode);
    const m = bytes[from] === 45 ? -mantissa() : mantissa();
    if (mode === INSTANT) {
      this.mantissa = m;
      this.exponent = e;
      return p;
    }
    const { slots, powers, values } = this.plan;
    e += powers[column];
    values[slots[column]] = e <= 0 && e >= -22 ? m / POWERS[-e] : scaled(m, e);
    return p;
  }

  /** The same for a cell that is no plain number, by the full grammar. */
  private wordCell(bytes: Uint8Array, from: number, column: number, mode: number): number {
    const p = this.slowCell(bytes, from);
    const { kind } = this.cell;
    const known = kind === NUMBER || (mode === VALUE && kind === BITS);
    if (!known && this.odd === "" && (mode === INSTANT || kind !== UNKNOWN)) this.odd = mode === INSTANT ? "time" : "cell";
    if (mode === INSTANT) {
      this.mantissa = this.cell.mantissa;
      this.exponent = this.cell.exponent;
      return p;
    }
    const { slots, powers, values } = this.plan;
    values[slots[column]] = known ? scaled(this.cell.mantissa, this.cell.exponent + powers[column]) : Number.NaN;
    return p;
  }

  /** Instant of the row at hand, in ticks. */
  tick(mantissa: number, exponent: number): number {
    const { clock } = this.plan;
    if (clock.column < 0) return Math.round(clock.start + this.rowNumber * (clock.factor ?? 1));
    if (exponent !== this.exponentNow) {
      this.exponentNow = exponent;
      const power = exponent + clock.power;
      this.multiplier = clock.factor !== null ? scaled(clock.factor, exponent) : power >= 0 ? scaled(1, power) : 1;
      this.divisor = clock.factor === null && power < 0 ? scaled(1, -power) : 1;
    }
    return Math.round((mantissa * this.multiplier) / this.divisor + clock.start) + 0;
  }

  /** Reads the cell at `from` by the full grammar; returns the position of its end. */
  private slowCell(bytes: Uint8Array, from: number): number {
    let p = from;
    while (bytes[p] !== this.delimiter && bytes[p] !== LF && bytes[p] !== CR) p += 1;
    this.cell.read(bytes, from, p, this.decimal);
    return p;
  }

  /** A row that the bytes do not explain. Where it holds quotes, papaparse splits it. */
  private oddRow(bytes: Uint8Array, from: number, to: number, reason: AsideReason): void {
    const at = bytes.indexOf(34, from);
    if (at < 0 || at >= to) {
      this.target.aside(this.line, reason);
      return;
    }
    let text = "";
    for (let p = from; p < to; p += 1) text += String.fromCharCode(bytes[p]);
    this.cells(splitText(text, this.plan.dialect.delimiter, false).rows[0] ?? []);
  }

  /** A row that was split elsewhere: the same cells, read by the same grammar. */
  cells(row: readonly string[]): void {
    const { modes, slots, powers, values, width, namedWidth, clock } = this.plan;
    const extra = row.slice(namedWidth).some((text) => text.trim() !== "");
    let reason: AsideReason | null = row.length < width || extra ? "width" : null;
    let mantissa = 0;
    let exponent = 0;
    for (let column = 0; column < width && reason === null; column += 1) {
      const mode = modes[column];
      if (mode === SKIP) continue;
      const kind = readText(this.cell, row[column], this.decimal);
      if (mode === LEVEL) {
        const level = this.cell.level();
        if (level < 0) reason = "cell";
        else values[slots[column]] = level;
      } else if (mode === INSTANT) {
        if (kind !== NUMBER) reason = "time";
        mantissa = this.cell.mantissa;
        exponent = this.cell.exponent;
      } else if (kind === NUMBER || kind === BITS)
        values[slots[column]] = scaled(this.cell.mantissa, this.cell.exponent + powers[column]);
      else if (kind === UNKNOWN) values[slots[column]] = Number.NaN;
      else reason = "cell";
    }
    if (reason !== null) this.target.aside(this.line, reason);
    else this.target.row(this.tick(mantissa, clock.column < 0 ? 0 : exponent), this.line);
  }
}

function blank(bytes: Uint8Array, from: number, to: number): boolean {
  for (let p = from; p < to; p += 1) if (bytes[p] !== 32 && bytes[p] !== 9) return false;
  return true;
}
