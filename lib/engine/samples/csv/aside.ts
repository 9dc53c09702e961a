// In: rows that could not be used, one by one. Out: how many, the first lines, and the warnings that say so.

import type { Warning } from "../../../base/result";

/** Why a row was set aside. */
export type AsideReason = "width" | "cell" | "time" | "backwards" | "quote";

const SHOWN_LINES = 5;

const WORDS: Readonly<Record<AsideReason, string>> = {
  width: "has another number of columns than the table",
  cell: "has a cell that is neither a number nor a level",
  time: "has no readable time",
  backwards: "has a time that does not come after the row before it",
  quote: "opens a quote that is never closed",
};

export class Aside {
  count = 0;
  private readonly firsts = new Map<AsideReason, { count: number; lines: number[] }>();

  add(line: number, reason: AsideReason): void {
    this.count += 1;
    const entry = this.firsts.get(reason);
    if (entry === undefined) this.firsts.set(reason, { count: 1, lines: [line] });
    else {
      entry.count += 1;
      if (entry.lines.length < SHOWN_LINES) entry.lines.push(line);
    }
  }

  /** One warning per reason: {line: the first, count}. */
  warnings(): Warning[] {
    return [...this.firsts].map(([reason, { count, lines }]) => ({
      code: reason === "backwards" ? "time-backwards" : "row-set-aside",
      message:
        count === 1
          ? `Line ${lines[0]} ${WORDS[reason]}; it was set aside.`
          : `${count} rows were set aside: each ${WORDS[reason]} (line${lines.length > 1 ? "s" : ""} ${lines.join(", ")}${count > lines.length ? ", ..." : ""}).`,
      line: lines[0],
      count,
    }));
  }

  /** First line and its reason, for a refusal. */
  first(): { readonly line: number; readonly words: string } | null {
    for (const [reason, { lines }] of this.firsts) return { line: lines[0], words: WORDS[reason] };
    return null;
  }
}
