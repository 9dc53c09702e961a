// In: a line trace and what its name says. Out: the types that the channel finder's parts share.

import type { NameClue } from "./names";
import type { PairCount } from "./pair";
import type { LineTrace } from "./trace";

export interface Line {
  readonly trace: LineTrace;
  readonly clue: NameClue;
}

export interface Pair {
  readonly scl: Line;
  readonly sda: Line;
  readonly count: PairCount;
  /** Of the names: both say so, for one and the same bus. 0 where they say nothing. */
  readonly named: number;
}

/** More active lines than this are not tried against each other by behaviour alone. */
export const LINES_TRIED = 160;

/** A line as a person knows it: its id, and its name where the id does not hold it. */
export function label(line: Line): string {
  const { id, name } = line.trace;
  return name === "" || id.endsWith(name) ? id : `${id} (${name})`;
}
