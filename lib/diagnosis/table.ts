// In: a small CSV text (roster, log). Out: its records with their line numbers. RFC 4180, and semicolon or tab where the first
// line has more of those than commas.

import { ok, type Result, refuse } from "../base/result";

export interface TableRecord {
  readonly line: number;
  readonly cells: readonly string[];
}

export function tableOf(text: string): Result<TableRecord[]> {
  const body = text.startsWith("\uFEFF") ? text.slice(1) : text;
  const delimiter = delimiterOf(body.split(/[\r\n]/, 1)[0]);
  const records: TableRecord[] = [];
  let cells: string[] = [];
  let cell = "";
  let line = 1;
  let began = 1;
  let quoted = false;
  const endRecord = () => {
    cells.push(cell);
    if (cells.length > 1 || cells[0].trim() !== "") records.push({ line: began, cells: cells.map((entry) => entry.trim()) });
    cells = [];
    cell = "";
    began = line;
  };
  for (let i = 0; i < body.length; i++) {
    const c = body[i];
    if (quoted) {
      if (c === "\n") line++;
      if (c !== '"') cell += c;
      else if (body[i + 1] === '"') {
        cell += '"';
        i++;
      } else quoted = false;
    } else if (c === '"' && cell.trim() === "") {
      quoted = true;
      cell = "";
    } else if (c === delimiter) {
      cells.push(cell);
      cell = "";
    } else if (c === "\n" || c === "\r") {
      if (c === "\r" && body[i + 1] === "\n") i++;
      line++;
      endRecord();
    } else cell += c;
  }
  if (quoted) {
    return refuse({
      code: "open-quote",
      message: `Line ${began}: a quote is opened and never closed.`,
      advice: "Close the quote, or double it where it belongs to the text.",
      place: { line: began },
    });
  }
  endRecord();
  return ok(records);
}

function delimiterOf(first: string): string {
  const count = (c: string) => first.split(c).length - 1;
  return [",", ";", "\t"].reduce((best, c) => (count(c) > count(best) ? c : best));
}

/** One cell for writing. A cell that a spreadsheet would run as a formula gets an apostrophe before it. */
export function writtenCell(text: string): string {
  const safe = /^[=+\-@]/.test(text) && Number.isNaN(Number(text)) ? `'${text}` : text;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

/** The reverse of `writtenCell`'s apostrophe. */
export function readCell(text: string): string {
  return /^'[=+\-@]/.test(text) ? text.slice(1) : text;
}
