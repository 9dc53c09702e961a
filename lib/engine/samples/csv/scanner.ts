// In: chunks of a CSV body, cut anywhere. Out: blocks of rows, each with its instant and the wanted cells' values. Bytes
// only: no string is made for a regular row, and instants are exact whole-number mantissas until they are ticks.

import type { AsideReason } from "./aside";
import { RowBlock } from "./block";
import { BITS, Cell, NUMBER, readText, scaled, UNKNOWN } from "./cell";
import { INSTANT, LEVEL, type ScanPlan, SKIP } from "./plan";
import { Regions } from "./regions";
import { readRows } from "./regular";
import type { RowTarget } from "./rows";
import { splitText } from "./split";

const CR = 13;
const LF = 10;

export interface FastPath {
  /** Takes regular rows from `from` on; returns the position of the first row it leaves to the scanner. */
  scan(bytes: Uint8Array, from: number, to: number, scanner: Scanner): number;
}

/** Rows that the scanner reads before it asks the fast path again: more each time that it was asked in vain. */
const LEAST_ASIDE = 16;
const MOST_ASIDE = 4096;
/** Bytes that a fast path must take for having been worth asking. */
const WORTH_BYTES = 1024;

export class Scanner {
  /** Line of the row at hand, from 1. */
  line = 1;
  /** Rows read since the first row of readings, used or not. */
  rowNumber = 0;
  private readonly regions = new Regions((bytes, from, to) => this.region(bytes, from, to));
  /** Rows from `line` on that were read and not handed on. */
  readonly block: RowBlock;
  private readonly cell = new Cell();
  /** What is wrong with the row at hand, and the reading of the cell at hand. */
  private odd: AsideReason | "" = "";
  private reading = 0;
  private lastByte = 0;
  private aside = LEAST_ASIDE;
  private readonly delimiter: number;
  private readonly decimal: number;
  private readonly spaces: boolean;

  constructor(
    readonly plan: ScanPlan,
    private readonly target: RowTarget,
    private readonly fast: FastPath | null,
  ) {
    this.block = new RowBlock(plan.values.length);
    this.delimiter = plan.dialect.delimiter.charCodeAt(0);
    this.decimal = plan.dialect.decimal.charCodeAt(0);
    this.spaces = plan.dialect.delimiter === " ";
  }

  push(input: Uint8Array): void {
    this.regions.push(this.spaces ? input.map((byte) => (byte === 9 ? 32 : byte)) : input);
  }

  finish(): void {
    this.regions.finish();
  }

  /** Whole rows. */
  private region(bytes: Uint8Array, from: number, to: number): void {
    let p = from;
    if (bytes[p] === LF && this.lastByte === CR) p += 1;
    while (p < to && this.line < this.plan.firstLine) p = this.skipLine(bytes, p, to);
    while (p < to) {
      const asked = p;
      if (this.fast !== null) p = this.fast.scan(bytes, p, to, this);
      this.aside = p - asked > WORTH_BYTES ? LEAST_ASIDE : Math.min(MOST_ASIDE, 2 * this.aside);
      if (p < to) p = this.scan(bytes, p, to, this.fast === null ? Number.POSITIVE_INFINITY : this.aside);
    }
    this.lastByte = bytes[to - 1];
  }

  private skipLine(bytes: Uint8Array, from: number, to: number): number {
    let p = from;
    while (bytes[p] !== LF && bytes[p] !== CR) p += 1;
    this.line += 1;
    return bytes[p] === CR && p + 1 < to && bytes[p + 1] === LF ? p + 2 : p + 1;
  }

  /** Reads up to `limit` rows, regular ones at once; returns the position after them. */
  private scan(bytes: Uint8Array, from: number, to: number, limit: number): number {
    const { plan, block } = this;
    const until = this.rowNumber + limit;
    let p = from;
    while (p < to && this.rowNumber + block.length < until) {
      const most = Math.min(block.capacity, until - this.rowNumber);
      p = readRows(bytes, p, to, plan, block, most);
      if (block.length === block.capacity) this.flush();
      else if (p < to && block.length < most) p = this.readRow(bytes, p, to);
    }
    this.flush();
    return p;
  }

  /** Reads one row by the full grammar; returns the position after it. */
  private readRow(bytes: Uint8Array, from: number, to: number): number {
    const { block, plan, spaces } = this;
    let p = from;
    if (spaces) while (bytes[p] === 32) p += 1;
    const start = p;
    this.odd = "";
    let column = 0;
    let more = bytes[p] !== LF && bytes[p] !== CR;
    for (; more; column += 1) {
      const wanted = column < plan.width && plan.modes[column] !== SKIP;
      p = wanted ? this.wantedCell(bytes, p, column) : this.skipCell(bytes, p, column);
      more = bytes[p] === this.delimiter;
      if (more) p += 1;
      if (spaces) while (bytes[p] === 32) p += 1;
      if (spaces && (bytes[p] === LF || bytes[p] === CR)) more = false;
    }
    if (column < plan.width) this.odd = "width";
    const end = p;
    p += bytes[p] === CR && p + 1 < to && bytes[p + 1] === LF ? 2 : 1;
    if (column > 0 && this.odd === "") {
      block.length += 1;
      if (block.length === block.capacity) this.flush();
      return p;
    }
    this.flush();
    if (column > 0) {
      this.oddRow(bytes, start, end);
      this.rowNumber += 1;
    }
    this.line += 1;
    return p;
  }

  /** Hands on the rows that were read. */
  flush(): void {
    const { block } = this;
    if (block.length === 0) return;
    block.line = this.line;
    if (this.plan.clock.column < 0) for (let i = 0; i < block.length; i += 1) block.ticks[i] = this.countedTick(i);
    this.target.rows(block);
    this.line += block.length;
    this.rowNumber += block.length;
    block.length = 0;
  }

  /** A cell that nobody asked for; past the named columns it must be empty. Returns the position of its end. */
  private skipCell(bytes: Uint8Array, from: number, column: number): number {
    let p = from;
    while (bytes[p] !== this.delimiter && bytes[p] !== LF && bytes[p] !== CR) p += 1;
    if (column >= this.plan.namedWidth && p > from && !blank(bytes, from, p)) this.odd = "width";
    return p;
  }

  /** Reads a wanted cell by the full grammar; returns the position of its end. */
  private wantedCell(bytes: Uint8Array, from: number, column: number): number {
    const { block, cell } = this;
    let p = from;
    while (bytes[p] !== this.delimiter && bytes[p] !== LF && bytes[p] !== CR) p += 1;
    cell.read(bytes, from, p, this.decimal);
    const wrong = this.judge(column);
    if (wrong !== "") this.odd = this.odd === "" ? wrong : this.odd;
    else if (this.plan.modes[column] === INSTANT) block.ticks[block.length] = this.tick(cell.mantissa, cell.exponent);
    else block.readings[block.length * block.width + this.plan.slots[column]] = this.reading;
    return p;
  }

  /** What is wrong with the cell that was read, for its column; if nothing is, `reading` is what it says. */
  private judge(column: number): AsideReason | "" {
    const { kind } = this.cell;
    const mode = this.plan.modes[column];
    if (mode === INSTANT) return kind === NUMBER ? "" : "time";
    if (mode === LEVEL) this.reading = this.cell.level();
    else if (kind === NUMBER || kind === BITS)
      this.reading = scaled(this.cell.mantissa, this.cell.exponent + this.plan.powers[column]);
    else if (kind === UNKNOWN) this.reading = Number.NaN;
    else return "cell";
    return this.reading < 0 && mode === LEVEL ? "cell" : "";
  }

  /** Instant of the row at hand, in ticks. */
  private tick(mantissa: number, exponent: number): number {
    const { power, factor, start } = this.plan.clock;
    const ticks = factor === null ? scaled(mantissa, exponent + power) : mantissa * scaled(factor, exponent);
    return Math.round(ticks + start) + 0;
  }

  /** Instant of the row `ahead` rows on, where rows are only counted. */
  private countedTick(ahead: number): number {
    return Math.round(this.plan.clock.start + (this.rowNumber + ahead) * (this.plan.clock.factor ?? 1));
  }

  /** A row that the bytes do not explain. Where it holds quotes, papaparse splits it. */
  private oddRow(bytes: Uint8Array, from: number, to: number): void {
    const at = bytes.indexOf(34, from);
    if (this.odd !== "" && (at < 0 || at >= to)) {
      this.target.aside(this.line, this.odd);
      return;
    }
    let text = "";
    for (let p = from; p < to; p += 1) text += String.fromCharCode(bytes[p]);
    this.cells(splitText(text, this.plan.dialect.delimiter, false).rows[0] ?? []);
  }

  /** A row that was split elsewhere: the same cells, read by the same grammar. */
  cells(row: readonly string[]): void {
    const { modes, slots, values, width, namedWidth, clock } = this.plan;
    const extra = row.slice(namedWidth).some((text) => text.trim() !== "");
    let reason: AsideReason | "" = row.length < width || extra ? "width" : "";
    let tick = clock.column < 0 ? this.countedTick(0) : 0;
    for (let column = 0; column < width && reason === ""; column += 1) {
      if (modes[column] === SKIP) continue;
      readText(this.cell, row[column], this.decimal);
      reason = this.judge(column);
      if (modes[column] === INSTANT) tick = this.tick(this.cell.mantissa, this.cell.exponent);
      else values[slots[column]] = this.reading;
    }
    if (reason !== "") this.target.aside(this.line, reason);
    else this.target.row(tick, this.line);
  }
}

function blank(bytes: Uint8Array, from: number, to: number): boolean {
  for (let p = from; p < to; p += 1) if (bytes[p] !== 32 && bytes[p] !== 9) return false;
  return true;
}
