// In: text of a CSV or whole rows of it. Out: cells, as RFC 4180 section 2 quotes them, through papaparse; runs of spaces,
// which no CSV library splits, by hand.

import Papa from "papaparse/papaparse.min.js";

/** Delimiter " " stands for any run of spaces and tabs. */
export interface Dialect {
  readonly delimiter: "," | ";" | "\t" | "|" | " ";
  readonly decimal: "." | ",";
  /** Data cells stand in quotes: the body goes through papaparse. */
  readonly quoted: boolean;
}

export interface SplitText {
  readonly rows: string[][];
  /** Characters used, up to the end of the last whole row. */
  readonly used: number;
}

/** `text` has only LF line ends (see `lineFeeds`). With `partial`, an unfinished last row is left for the next call. */
export function splitText(text: string, delimiter: Dialect["delimiter"], partial: boolean): SplitText {
  if (delimiter === " ") return splitSpaces(text, partial);
  const read = new Papa.Parser({ delimiter, newline: "\n", quoteChar: '"' }).parse(text, 0, partial);
  const rows = read.data;
  // After a final line end papaparse reports one more row, holding one empty cell, that is no line of the file.
  const last = rows[rows.length - 1];
  if (!partial && last !== undefined && last.length === 1 && last[0] === "" && text.endsWith("\n")) rows.pop();
  return { rows, used: partial ? read.meta.cursor : text.length };
}

function splitSpaces(text: string, partial: boolean): SplitText {
  const end = partial ? text.lastIndexOf("\n") + 1 : text.length;
  const body = text.slice(0, end).replace(/\n$/, "");
  if (end === 0) return { rows: [], used: 0 };
  return { rows: body.split("\n").map((line) => line.trim().split(/[ \t]+/)), used: end };
}

/** CRLF and CR become LF. A CR at the very end is left to the caller, whose next text may begin with its LF. */
export function lineFeeds(text: string): string {
  return text.includes("\r") ? text.replace(/\r\n?/g, "\n") : text;
}

/** Lines of the file that one row takes up: quoted cells may hold line ends. */
export function linesOf(row: readonly string[]): number {
  let lines = 1;
  for (const cell of row) {
    for (let at = cell.indexOf("\n"); at >= 0; at = cell.indexOf("\n", at + 1)) lines += 1;
  }
  return lines;
}
