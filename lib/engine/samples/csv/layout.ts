// In: the head of a CSV as a table. Out: the layout: where the readings begin, what each column is, what the preamble says.

import { BITS, Cell, HIGH, LOW, NUMBER, RELEASED, readText, UNKNOWN } from "./cell";
import { type HeadRow, type HeadTable, isReadings, trimmed } from "./dialect";
import { isTimingKey, isUnitsRow, type Metadata, metadataOf } from "./metadata";
import type { Dialect } from "./split";
import { isOrdinalName, isTimeName, parseUnit, splitHeader, type Unit } from "./unit";

/** What a column's cells are. bits: a packed word written 0x.., 0b.. or as a number; pattern: as digits 0 and 1. */
export type Role = "time" | "ordinal" | "digital" | "volts" | "counts" | "bits" | "pattern" | "other";

export interface Column {
  /** From 0. */
  readonly index: number;
  readonly name: string;
  readonly unit: Unit | null;
  readonly role: Role;
  /** Bits of a packed word, otherwise 0. */
  readonly bits: number;
}

export interface Layout {
  readonly dialect: Dialect;
  /** Line of the first row of readings, from 1. */
  readonly firstLine: number;
  /** Cells that a row of readings must have; empty ones after them are tolerated. */
  readonly width: number;
  /** Cells that the header names; text in those past `width` (a note on some rows) is tolerated. */
  readonly namedWidth: number;
  readonly columns: readonly Column[];
  readonly metadata: Metadata;
  /** False where the file has no header row. */
  readonly named: boolean;
  /** Channels have time columns of their own whose times differ; a channel's is the nearest one to its left. */
  readonly ownTimes: boolean;
}

/** The time column that a channel's column goes by. */
export function timeColumnOf(layout: Layout, column: Column): Column | null {
  const times = layout.columns.filter((one) => one.role === "time");
  return times.findLast((one) => one.index < column.index) ?? times[0] ?? null;
}

/** Rows of the head by which columns are judged. */
const JUDGED_ROWS = 2000;

export function layoutOf(table: HeadTable): Layout {
  const { rows, width, dialect } = table;
  const first = headerAmongReadings(table) ? nextFilled(rows, table.first + 1) : table.first;
  const judged = rows
    .slice(first, first + JUDGED_ROWS)
    .filter((row) => isReadings(trimmed(row.cells), dialect.decimal, table.texts));
  const facts = Array.from({ length: width }, (_, index) => factsOf(judged, index, dialect));
  const bare = facts.map((fact, index) => columnOf(index, "", "", fact));
  const top = topOfTable(rows, first, settleTime(bare, facts), dialect);
  const header = takeHeader(
    rows.slice(0, top).filter((row) => trimmed(row.cells).length > 0),
    width,
    dialect,
  );
  const columns = facts.map((fact, index) => {
    const column = columnOf(index, header.names[index] ?? "", header.units[index] ?? "", fact);
    return table.texts.has(index) ? { ...column, role: "other" as const, bits: 0 } : column;
  });
  const settled = settleSole(settleTime(columns, facts), facts);
  const keys = [...header.preamble, ...rows.slice(top, first).map((row) => leftOf(row, settled))];
  return {
    dialect,
    firstLine: rows[top].line,
    width,
    namedWidth: Math.max(width, header.namedWidth),
    columns: settled,
    metadata: [...metadataOf(keys), ...header.beside],
    named: header.named,
    ownTimes: timesDiffer(settled, judged),
  };
}

/** Key/value rows may stand to the left of the first readings: those rows are readings too. */
function topOfTable(rows: readonly HeadRow[], first: number, columns: readonly Column[], dialect: Dialect): number {
  const read = columns.filter((column) => column.role !== "other");
  if (read.length < 2 || read[0].index === 0) return first;
  let top = first;
  while (top > 0) {
    const { cells } = rows[top - 1];
    if (!read.every((column) => kindOf(cells[column.index] ?? "", dialect) === NUMBER)) break;
    top -= 1;
  }
  return top;
}

/** The cells of a row that stand left of the readings. */
function leftOf(row: HeadRow, columns: readonly Column[]): HeadRow {
  const from = columns.find((column) => column.role !== "other")?.index ?? 0;
  return { line: row.line, cells: row.cells.slice(0, from) };
}

function timesDiffer(columns: readonly Column[], rows: readonly HeadRow[]): boolean {
  const times = columns.filter((column) => column.role === "time");
  if (times.length < 2) return false;
  return rows.some((row) =>
    times.some((column) => (row.cells[column.index] ?? "").trim() !== (row.cells[times[0].index] ?? "").trim()),
  );
}

function nextFilled(rows: readonly HeadRow[], from: number): number {
  let at = from;
  while (at < rows.length - 1 && trimmed(rows[at].cells).length === 0) at += 1;
  return at;
}

/** A header of pin numbers or of one-letter names passes for readings: "s,0,1" or "0,1,2" above columns of 0 and 1. */
function headerAmongReadings(table: HeadTable): boolean {
  const { rows, first, width, dialect } = table;
  const following = rows
    .slice(first + 1, first + 200)
    .map((row) => trimmed(row.cells))
    .filter((cells) => cells.length === width && isReadings(cells, dialect.decimal, table.texts));
  if (following.length === 0) return false;
  const top = trimmed(rows[first].cells);
  let foreign = 0;
  for (let c = 0; c < width; c += 1) {
    const text = (top[c] ?? "").trim();
    const numbers = following.every((cells) => kindOf(cells[c], dialect) === NUMBER);
    if (numbers && /^[a-zA-Z]$/.test(text)) foreign += 1;
    const logic = numbers && following.every((cells) => /^\s*[01]\s*$/.test(cells[c]));
    if (logic && /^\d+$/.test(text) && Number(text) > 1) foreign += 1;
  }
  return foreign > 0;
}

const cell = new Cell();

function kindOf(text: string, dialect: Dialect): number {
  return readText(cell, text, dialect.decimal.charCodeAt(0));
}

interface Header {
  readonly names: readonly string[];
  readonly units: readonly string[];
  readonly preamble: readonly HeadRow[];
  readonly beside: readonly (readonly [string, string])[];
  readonly namedWidth: number;
  readonly named: boolean;
}

function takeHeader(before: readonly HeadRow[], width: number, dialect: Dialect): Header {
  const rows = [...before];
  let units: readonly string[] = [];
  let names: readonly string[] = [];
  const fits = (row: HeadRow | undefined): row is HeadRow =>
    row !== undefined && Math.max(row.cells.length, trimmed(row.cells).length) >= Math.max(1, width - 1);
  let last = rows[rows.length - 1];
  const belowNames = fits(rows[rows.length - 2]) && isHeader(rows[rows.length - 2], width);
  if (fits(last) && isUnitsRow(last.cells.slice(0, width), belowNames) && width > 1) {
    units = last.cells.map((text) => text.replace(/^#\s*/, ""));
    rows.pop();
    last = rows[rows.length - 1];
  }
  if (fits(last) && isHeader(last, width)) {
    names = last.cells.map((text, i) => (i === 0 ? text.replace(/^(?:#|%|\/\/|;)+\s*/, "") : text).trim());
    rows.pop();
  }
  // A unit alone in a cell of the header ("s,SCL,SDA") is that column's unit as well.
  if (units.length === 0) units = names.map((text) => (parseUnit(text) === null || dialect.delimiter === " " ? "" : text));
  return {
    names: names.slice(0, width),
    units,
    preamble: rows,
    beside: besideTable(names, units, width),
    namedWidth: trimmed(names).length,
    named: names.length > 0,
  };
}

/** A name past the table with a number under it, where units stand under the others: "..., Increment" above "..., 5e-07". */
function besideTable(names: readonly string[], units: readonly string[], width: number): [string, string][] {
  const pairs = names.map((name, i): [string, string] => [name.trim(), (units[i] ?? "").trim()]);
  return pairs.filter(([name, value], i) => i >= width && name !== "" && /^[+-]?[\d.]/.test(value));
}

/** "Sample interval,1e-7" directly above two columns of readings is no header. */
function isHeader(row: HeadRow, width: number): boolean {
  const cells = trimmed(row.cells);
  if (cells.length === 2 && /^[+-]?[\d.,]/.test(cells[1].trim()) && (isTimingKey(cells[0]) || width > 2)) return false;
  if (cells.length === 1) return width === 1 && !/[:=]/.test(cells[0]);
  return true;
}

interface Facts {
  readonly numbers: readonly number[];
  readonly texts: readonly string[];
  readonly words: number;
  readonly hex: number;
  readonly unknown: number;
  /** Every number is a time of day. */
  readonly clock: boolean;
  readonly integer: boolean;
  readonly bits: number;
}

function factsOf(rows: readonly HeadRow[], index: number, dialect: Dialect): Facts {
  const numbers: number[] = [];
  const texts: string[] = [];
  let words = 0;
  let hex = 0;
  let unknown = 0;
  let bits = 0;
  let clock = 0;
  for (const row of rows) {
    const text = (row.cells[index] ?? "").trim();
    const kind = kindOf(text, dialect);
    if (kind === NUMBER) {
      if (text.includes(":")) clock += 1;
      numbers.push(cell.value());
      texts.push(text);
    } else if (kind === BITS) {
      hex += 1;
      bits = Math.max(bits, /^0x/i.test(text) ? (text.length - 2) * 4 : text.length - 2);
    } else if (kind === UNKNOWN) unknown += 1;
    else if (kind === LOW || kind === HIGH || kind === RELEASED) words += 1;
  }
  return {
    numbers,
    texts,
    words,
    hex,
    unknown,
    clock: clock > 0 && clock === numbers.length,
    integer: texts.every((text) => /^[+-]?\d+$/.test(text)),
    bits,
  };
}

function columnOf(index: number, header: string, unitText: string, facts: Facts): Column {
  const split = splitHeader(header);
  const unit = facts.clock ? parseUnit("s") : (parseUnit(unitText) ?? split.unit);
  const name = parseUnit(header) !== null && unitText === header ? "" : split.name;
  const range = /\[(\d+):(\d+)\]$/.exec(header.trim());
  const bits = range === null ? facts.bits : Math.abs(Number(range[1]) - Number(range[2])) + 1;
  return { index, name: range === null ? name : header.trim(), unit, role: roleOf(name, unit, facts, range !== null), bits };
}

function roleOf(name: string, unit: Unit | null, facts: Facts, ranged: boolean): Role {
  const { numbers, texts } = facts;
  if (facts.hex > 0) return "bits";
  if (numbers.length === 0) return facts.words > 0 ? "digital" : "other";
  if (unit?.quantity === "time") return "time";
  if (unit?.quantity === "voltage") return "volts";
  if (unit?.quantity === "count") return isOrdinalName(name) ? "ordinal" : "counts";
  if (isOrdinalName(name) && facts.integer && rises(numbers)) return "ordinal";
  if (isTimeName(name) && rises(numbers)) return facts.integer ? "ordinal" : "time";
  if (ranged && facts.integer) return "bits";
  if (texts.length > 1 && texts.every((text) => /^[01]{2,32}$/.test(text) && text.length === texts[0].length)) return "pattern";
  // One stray number does not make a column of levels into counts: its row is set aside.
  const levels = texts.filter((text) => /^[+-]?[01](?:[.,]0?)?$/.test(text)).length;
  if (levels === texts.length || (levels >= 8 && levels >= texts.length * LEVEL_SHARE)) return "digital";
  return facts.integer ? "counts" : "volts";
}

/** Share of its numbers that must be 0 or 1 in a column of levels. */
const LEVEL_SHARE = 0.98;

/** Goes up and hardly ever down; a few rows out of order are set aside later. */
function rises(numbers: readonly number[]): boolean {
  const { up, down } = moves(numbers);
  return numbers.length < 2 || (up > 0 && down * 20 <= up);
}

function moves(numbers: readonly number[]): { readonly up: number; readonly down: number } {
  let up = 0;
  let down = 0;
  for (let i = 1; i < numbers.length; i += 1) {
    if (numbers[i] > numbers[i - 1]) up += 1;
    else if (numbers[i] < numbers[i - 1]) down += 1;
  }
  return { up, down };
}

/** A column without a time name is the time where it goes up in many rows and hardly ever down; only the first such one. */
function settleTime(columns: readonly Column[], facts: readonly Facts[]): Column[] {
  if (columns.some((column) => column.role === "time" || column.role === "ordinal")) return [...columns];
  const at = columns.findIndex((column) => {
    const { numbers } = facts[column.index];
    if ((column.role !== "volts" && column.role !== "counts") || column.unit !== null || numbers.length < 2) return false;
    if (!rises(numbers)) return false;
    const { up } = moves(numbers);
    return numbers.length < 8 ? up === numbers.length - 1 : up > numbers.length / 20;
  });
  return columns.map((column, i) => (i === at ? { ...column, role: facts[i].integer ? "ordinal" : "time" } : column));
}

/** One column of small whole numbers beside the time: a word of bits per row (0..3 for two lines). */
function settleSole(columns: readonly Column[], facts: readonly Facts[]): Column[] {
  const lines = columns.filter((column) => column.role !== "time" && column.role !== "ordinal" && column.role !== "other");
  return columns.map((column) => {
    if (column.role === "pattern") return { ...column, bits: facts[column.index].texts[0].length };
    if (lines.length !== 1 || column !== lines[0] || column.role !== "counts" || column.unit !== null) return column;
    const top = Math.max(...facts[column.index].numbers);
    return top <= 15 && Math.min(...facts[column.index].numbers) >= 0
      ? { ...column, role: "bits", bits: top > 3 ? 4 : 2 }
      : column;
  });
}
