// In: the first part of a text file. Out: delimiter and decimal mark, found together, and where the table of readings
// begins; or a refusal that says why there is none.

import { ok, type Problem, type Result, refuse } from "../../../base/result";
import { BAD, Cell, readText, UNKNOWN } from "./cell";
import { type Dialect, lineFeeds, linesOf, splitText } from "./split";

export interface HeadRow {
  readonly cells: readonly string[];
  /** Line of the file, from 1. */
  readonly line: number;
}

export interface HeadTable {
  readonly dialect: Dialect;
  readonly rows: readonly HeadRow[];
  /** Index in `rows` of the first row of readings. */
  readonly first: number;
  /** Cells in a row of readings, trailing empty ones left out. */
  readonly width: number;
  readonly texts: TextColumns;
}

interface Candidate extends HeadTable {
  readonly score: number;
}

const DELIMITERS: readonly Dialect["delimiter"][] = [",", ";", "\t", "|", " "];
/** Characters of the head by which the dialect is judged. */
const JUDGED_CHARACTERS = 8192;
const cell = new Cell();

/** `whole`: the text is the entire file; otherwise its last, possibly unfinished row is left out. */
export function findDialect(text: string, whole: boolean): Result<HeadTable> {
  let body = lineFeeds(text);
  const hint = /^sep=(.)\n/i.exec(body);
  const skipped = hint === null ? 0 : 1;
  if (hint !== null) body = body.slice(hint[0].length);
  const delimiters =
    hint !== null && DELIMITERS.includes(hint[1] as Dialect["delimiter"]) ? [hint[1] as Dialect["delimiter"]] : DELIMITERS;
  // A few hundred rows tell the dialect; the rest of the head is only split once, in the dialect found.
  const few = body.slice(0, body.indexOf("\n", JUDGED_CHARACTERS) + 1);
  const judged = few === "" ? null : bestOf(few, delimiters, skipped, false);
  const best =
    judged === null
      ? bestOf(body, delimiters, skipped, !whole)
      : candidate(numbered(splitText(body, judged.dialect.delimiter, !whole).rows, skipped), judged.dialect, judged.texts);
  if (best === null) return refuse(noTable(body, skipped));
  const doubt = ambiguousComma(best);
  if (doubt !== null) return refuse(doubt);
  return ok({ ...best, dialect: { ...best.dialect, quoted: best.dialect.delimiter !== " " && quotedBody(body, best, skipped) } });
}

function bestOf(text: string, delimiters: readonly Dialect["delimiter"][], skipped: number, partial: boolean): Candidate | null {
  let best: Candidate | null = null;
  for (const delimiter of delimiters) {
    // A delimiter that does not occur makes one column; comma stands for all of those.
    if (delimiter !== "," && !text.includes(delimiter)) continue;
    const rows = numbered(splitText(text, delimiter, partial).rows, skipped);
    for (const decimal of decimals(delimiter, text)) {
      const dialect: Dialect = { delimiter, decimal, quoted: false };
      for (const found of [candidate(rows, dialect), besideText(rows, dialect)]) {
        if (found !== null && (best === null || found.score > best.score * 1.001)) best = found;
      }
    }
  }
  return best;
}

function decimals(delimiter: string, body: string): readonly Dialect["decimal"][] {
  return delimiter !== "," || body.includes('"') ? [".", ","] : ["."];
}

function numbered(rows: readonly string[][], skipped: number): HeadRow[] {
  let line = 1 + skipped;
  return rows.map((cells) => {
    const row = { cells, line };
    line += linesOf(cells);
    return row;
  });
}

/** Cells without the empty ones at the end (trailing delimiters). */
export function trimmed(cells: readonly string[]): readonly string[] {
  let length = cells.length;
  while (length > 0 && cells[length - 1].trim() === "") length -= 1;
  return length === cells.length ? cells : cells.slice(0, length);
}

/** Columns of text (notes, wall clock times) that a row of readings may carry. */
export type TextColumns = ReadonlySet<number>;
const NO_TEXT: TextColumns = new Set();

/** A row of readings: every cell says a number, a logic word or "no reading", text columns aside, and one says more than the last. */
export function isReadings(cells: readonly string[], decimal: Dialect["decimal"], texts: TextColumns = NO_TEXT): boolean {
  let readings = 0;
  for (let i = 0; i < cells.length; i += 1) {
    if (texts.has(i)) continue;
    const kind = readText(cell, cells[i], decimal.charCodeAt(0));
    if (kind === BAD) return false;
    if (kind !== UNKNOWN) readings += 1;
  }
  return readings > 0;
}

function candidate(rows: readonly HeadRow[], dialect: Dialect, texts: TextColumns = NO_TEXT): Candidate | null {
  const widths = new Map<number, number>();
  const flags: number[] = rows.map((row) => {
    const cells = trimmed(row.cells);
    if (cells.length === 0 || !isReadings(cells, dialect.decimal, texts)) return 0;
    widths.set(cells.length, (widths.get(cells.length) ?? 0) + 1);
    return cells.length;
  });
  const width = widthOf(widths, rows, flags);
  if (width === 0) return null;
  const count = flags.filter((flag) => flag > 0 && flag <= width).length;
  // One column fits any delimiter, so a table of several columns wins over it.
  return { dialect, rows, first: firstOfRun(flags, rows, width), width, texts, score: count * (width > 1 ? 2 : 1) };
}

/** The commonest width; or a wider one, where the narrower rows only lack a reading in their last cells. */
function widthOf(widths: ReadonlyMap<number, number>, rows: readonly HeadRow[], flags: readonly number[]): number {
  let width = 0;
  let count = 0;
  for (const [key, value] of widths) {
    if (value > count || (value === count && key > width)) {
      width = key;
      count = value;
    }
  }
  for (const [key, value] of widths) {
    const padded = key > width && value * 50 >= count && rows.every((row, i) => flags[i] !== width || row.cells.length >= key);
    if (padded) width = key;
  }
  return width;
}

/** Share of rows in which a column may hold text before it counts as a text column. */
const TEXT_SHARE = 0.1;

/** A table with columns of text beside at least two of readings. Runs of spaces are left out: prose would pass. */
function besideText(rows: readonly HeadRow[], dialect: Dialect): Candidate | null {
  if (dialect.delimiter === " ") return null;
  const decimal = dialect.decimal.charCodeAt(0);
  const kinds = rows.map((row) => trimmed(row.cells).map((text) => readText(cell, text, decimal)));
  const filled = kinds.filter((row) => row.filter((kind) => kind !== BAD && kind !== UNKNOWN).length >= 2);
  if (filled.length < 3) return null;
  const width = Math.max(...filled.map((row) => row.length));
  const texts = new Set<number>();
  for (let i = 0; i < width; i += 1) {
    if (filled.filter((row) => row[i] === BAD).length > filled.length * TEXT_SHARE) texts.add(i);
  }
  const found = texts.size === 0 || width - texts.size < 2 ? null : candidate(rows, dialect, texts);
  return found === null ? null : { ...found, score: (found.score * 0.5 * (width - texts.size)) / width };
}

/** The first row of readings that is followed by another one (blank lines aside), or the first at all. */
function firstOfRun(flags: readonly number[], rows: readonly HeadRow[], width: number): number {
  for (let i = 0; i < flags.length; i += 1) {
    if (flags[i] === 0 || flags[i] > width || rows[i].cells.length < width) continue;
    let next = i + 1;
    while (next < flags.length && trimmed(rows[next].cells).length === 0) next += 1;
    if (next < flags.length && flags[next] > 0) return i;
  }
  return flags.findIndex((flag) => flag > 0 && flag <= width);
}

function quotedBody(body: string, table: HeadTable, skipped: number): boolean {
  const lines = body.split("\n");
  for (let i = table.rows[table.first].line - 1 - skipped; i < lines.length; i += 1) if (lines[i].includes('"')) return true;
  return false;
}

/** "1,234" in every cell with a comma could be 1.234 or 1234: nothing in the file tells which. */
function ambiguousComma(table: HeadTable): Problem | null {
  if (table.dialect.decimal !== ",") return null;
  let doubt: HeadRow | null = null;
  let text = "";
  for (let i = table.first; i < table.rows.length; i += 1) {
    for (const value of table.rows[i].cells) {
      if (!value.includes(",")) continue;
      if (!/^\s*[+-]?[1-9]\d{0,2},\d{3}\s*$/.test(value)) return null;
      if (doubt === null) {
        doubt = table.rows[i];
        text = value.trim();
      }
    }
  }
  return doubt === null ? null : ambiguous(doubt.line, text);
}

function ambiguous(line: number, text: string): Problem {
  return {
    code: "ambiguous-number",
    message: `The mark in the number ${text} in line ${line} is ambiguous: it may be the decimal mark or may group thousands, and nothing in the file tells which.`,
    advice:
      "Export again without digit grouping, or with a decimal mark in every number; or take the grouping marks out of the column.",
    place: { line },
  };
}

function noTable(body: string, skipped: number): Problem {
  const lines = body.split("\n");
  for (let i = 0; i < lines.length; i += 1) {
    const grouped = /(?:^|[;\t" ])([+-]?\d{1,3}(?:[.,']\d{3})*(?:\.\d{3},\d+|,\d{3}\.\d+|'\d{3}(?:\.\d+)?))(?:$|[;\t" ,])/.exec(
      lines[i],
    );
    if (grouped !== null) return ambiguous(i + 1 + skipped, grouped[1]);
  }
  const at = Math.max(
    0,
    lines.findIndex((line) => line.trim() !== ""),
  );
  const sample = lines[at].trim().slice(0, 60);
  return {
    code: "no-readings",
    message: `The file holds text, but no table of readings: no row of numbers or 0/1 levels was found (line ${at + 1 + skipped} reads "${sample}").`,
    advice: "Export the sampled channels as CSV (time, SCL, SDA), not a log, a screenshot or a list of decoded messages.",
    place: { line: at + 1 + skipped },
  };
}
