// In: the layout and the head's rows. Out: a refusal where the column of times runs backwards. Read in the file's order its
// edges would come last first, and taken for something else it would be no time at all.

import type { Problem } from "../../../base/result";
import { Cell, NUMBER, readText } from "./cell";
import { type HeadRow, trimmed } from "./dialect";
import type { Column, Layout } from "./layout";
import { isTimeName } from "./unit";

/** So many steps down for each one up make a column that falls. */
const FALLS = 20;
const cell = new Cell();

interface Fall {
  readonly line: number;
  readonly text: string;
  readonly before: string;
}

/** By name or by unit. Levels are none: a channel may be called T or X. */
function isTime(column: Column): boolean {
  if (column.role === "time" || column.unit?.quantity === "time") return true;
  return column.unit === null && isTimeName(column.name) && (column.role === "volts" || column.role === "counts");
}

export function backwardsTime(layout: Layout, rows: readonly HeadRow[]): Problem | null {
  const readings = rows.filter((row) => row.line >= layout.firstLine && trimmed(row.cells).length >= layout.width);
  for (const column of layout.columns.filter(isTime)) {
    const fall = fallOf(column, layout, readings);
    if (fall === null) continue;
    const name = column.name === "" ? `Column ${column.index + 1}` : `The column "${column.name}"`;
    return {
      code: "time-runs-backwards",
      message: `${name} holds times that decrease from row to row: line ${fall.line} reads ${fall.text} after ${fall.before}.`,
      advice: "Sort the rows by time, the earliest first, or export again so that times increase down the file.",
      place: { line: fall.line },
    };
  }
  return null;
}

function fallOf(column: Column, layout: Layout, rows: readonly HeadRow[]): Fall | null {
  const decimal = layout.dialect.decimal.charCodeAt(0);
  let up = 0;
  let down = 0;
  let first: Fall | null = null;
  let before = Number.NaN;
  let textBefore = "";
  for (const row of rows) {
    const text = (row.cells[column.index] ?? "").trim();
    if (readText(cell, text, decimal) !== NUMBER) continue;
    const value = cell.value();
    if (value > before) up += 1;
    else if (value < before) {
      down += 1;
      first ??= { line: row.line, text, before: textBefore };
    }
    before = value;
    textBefore = text;
  }
  return down > up * FALLS ? first : null;
}
