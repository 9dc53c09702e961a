// In: one transaction, its edges and what was found about it. Out: the scene of its row in the stack: two lines at their
// exact instants and the score under them, all in ticks from START, so that every row can be drawn to one time scale.

import { FLAG } from "../engine/bus/transactions";
import { type EdgeColumns, type Line, levelOf } from "./edges";
import { beside, duration, hex } from "./format";
import type { Ledger, Row, RowByte } from "./ledger";
import type { RowMarks } from "./marks";

/** A line as its changes: `levels[k]` holds from `at[k]` on (ticks from START); `before` is the level up to the first. 2 is unknown. */
export interface LineChanges {
  readonly before: 0 | 1 | 2;
  readonly at: readonly number[];
  readonly levels: readonly (0 | 1 | 2)[];
}

export interface Pulse {
  /** Ticks from START: begin of the low before, rise, and fall that ends the high. */
  readonly low: number;
  readonly rise: number;
  readonly fall: number;
}

export interface Brace {
  readonly from: number;
  readonly to: number;
  readonly text: string;
  /** A byte that broke off: fewer than eight bits. */
  readonly broken: boolean;
}

export interface Letter {
  readonly at: number;
  readonly text: string;
  readonly kind: "ack" | "nack" | "expected-nack" | "condition";
}

/** A length given the way a drawing gives it: extension lines at both ends, an arrow between, the value, the limit. */
export interface Dimension {
  readonly from: number;
  readonly to: number;
  readonly text: string;
  readonly kind: "stretch" | "limit";
  readonly line: Line;
}

/** The deciding bit's own column, from the low before it to the end of its high. */
export interface Hatch {
  readonly from: number;
  readonly to: number;
  readonly side: "contest" | "retry";
}

export interface RowScene {
  readonly index: number;
  readonly span: number;
  readonly scl: LineChanges;
  readonly sda: LineChanges;
  readonly pulses: readonly Pulse[];
  readonly braces: readonly Brace[];
  readonly letters: readonly Letter[];
  readonly dimensions: readonly Dimension[];
  readonly hatches: readonly Hatch[];
  /** More edges than are drawn in a row: the drawing ends before the transaction does. */
  readonly cut: boolean;
}

/** A row draws at most so many edges; the strip shows the rest. */
export const ROW_EDGES = 20_000;

interface Traced {
  readonly scl: LineChanges;
  readonly sda: LineChanges;
  readonly pulses: Pulse[];
  readonly cut: boolean;
}

function trace(edges: EdgeColumns, row: Row): Traced {
  const first = row.startEdge;
  const last = Math.min(row.endEdge, first + ROW_EDGES, edges.length - 1);
  const before = edges.lines(first - 1);
  const lines: Record<Line, { at: number[]; levels: (0 | 1 | 2)[] }> = {
    scl: { at: [], levels: [] },
    sda: { at: [], levels: [] },
  };
  const pulses: Pulse[] = [];
  let low = 0;
  let rise = Number.NaN;
  let levels: Record<Line, 0 | 1 | 2> = { scl: levelOf(before, "scl"), sda: levelOf(before, "sda") };
  for (let k = first; k <= last; k++) {
    const at = edges.tick(k) - row.startTick;
    const now = edges.lines(k);
    const next: Record<Line, 0 | 1 | 2> = { scl: levelOf(now, "scl"), sda: levelOf(now, "sda") };
    for (const line of ["scl", "sda"] as const) {
      if (next[line] === levels[line]) continue;
      lines[line].at.push(at);
      lines[line].levels.push(next[line]);
    }
    if (k > first && next.scl === 1 && levels.scl !== 1) rise = at;
    if (next.scl !== 1 && levels.scl === 1) {
      if (!Number.isNaN(rise)) pulses.push({ low, rise, fall: at });
      low = at;
      rise = Number.NaN;
    }
    levels = next;
  }
  if (!Number.isNaN(rise) && row.closes === "none") pulses.push({ low, rise, fall: row.endTick - row.startTick });
  return {
    scl: { before: levelOf(before, "scl"), ...lines.scl },
    sda: { before: levelOf(before, "sda"), ...lines.sda },
    pulses,
    cut: last < row.endEdge,
  };
}

/** Index of the first pulse whose rise lies at or after `at`. */
function pulseAt(pulses: readonly Pulse[], at: number): number {
  let low = 0;
  let high = pulses.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (pulses[middle].rise < at) low = middle + 1;
    else high = middle;
  }
  return low;
}

function ninth(byte: RowByte, pulse: Pulse, closing: boolean): Letter {
  const at = (pulse.rise + pulse.fall) / 2;
  if (byte.ack) return { at, text: "A", kind: "ack" };
  // A controller that reads answers the last byte with NACK: the usual end, not a refusal.
  return { at, text: "N", kind: closing ? "expected-nack" : "nack" };
}

function score(row: Row, bytes: readonly RowByte[], pulses: readonly Pulse[]): { braces: Brace[]; letters: Letter[] } {
  const braces: Brace[] = [];
  const letters: Letter[] = [];
  bytes.forEach((byte, place) => {
    const first = pulseAt(pulses, byte.startTick - row.startTick);
    const last = pulses[Math.min(first + Math.max(1, byte.bits) - 1, pulses.length - 1)];
    if (!pulses[first] || !last) return;
    const broken = byte.bits < 8;
    const text = broken ? `${byte.value.toString(2).padStart(byte.bits, "0")}b` : hex(byte.value);
    braces.push({ from: pulses[first].rise, to: last.fall, text, broken });
    const after = pulses[first + 8];
    const reading = row.direction === "R" && place >= row.addressBytes && place === bytes.length - 1;
    if (after && byte.ack !== null) letters.push(ninth(byte, after, reading));
  });
  letters.push({ at: 0, text: row.opens, kind: "condition" });
  if (row.closes === "P") letters.push({ at: row.endTick - row.startTick, text: "P", kind: "condition" });
  return { braces, letters };
}

/** Which line a symbol of the specification is read on. */
function lineOf(parameter: string): Line {
  return /SU;DAT|HD;DAT|VD|BUF|SU;STO|^t[rf](DA)?$/.test(parameter) ? "sda" : "scl";
}

/** Most dimensions in one row: the worst of each parameter; more would lie over each other. */
const DIMENSIONS = 3;

function dimensions(
  row: Row,
  marks: RowMarks,
  pulses: readonly Pulse[],
  ticksPerSecond: number,
  startSeconds: number,
): Dimension[] {
  const list: Dimension[] = [];
  for (const stretch of [...marks.stretches].sort((a, b) => b.excess_s - a.excess_s).slice(0, 2)) {
    const from = (stretch.start_s - startSeconds) * ticksPerSecond;
    const habit = stretch.low_s - stretch.excess_s;
    const by = stretch.by === "unknown" ? "" : `, by ${stretch.by}`;
    const text = `${duration(stretch.low_s)} low, habit ${duration(habit)}${by}`;
    list.push({ from, to: from + stretch.low_s * ticksPerSecond, text, kind: "stretch", line: "scl" });
  }
  const seen = new Set<string>();
  for (const violation of marks.violations) {
    if (seen.has(violation.parameter) || list.length >= DIMENSIONS) continue;
    seen.add(violation.parameter);
    const at = (violation.time_s - startSeconds) * ticksPerSecond;
    const length = violation.measured_s * ticksPerSecond;
    if (at > row.endTick - row.startTick || length > 4 * (row.endTick - row.startTick)) continue;
    // A set-up time ends at the instant it is reported for where a pulse rises there; every other interval begins there.
    const ends = /SU/.test(violation.parameter) && pulses.some((pulse) => Math.abs(pulse.rise - at) < 1);
    const side = violation.side === "min" ? "at least" : "at most";
    const text = `${violation.parameter} ${beside(violation.measured_s, violation.limit_s)}, ${side} ${duration(violation.limit_s)}`;
    const line = lineOf(violation.parameter);
    list.push({ from: ends ? at - length : at, to: ends ? at : at + length, text, kind: "limit", line });
  }
  return list;
}

export interface RowSource {
  readonly edges: EdgeColumns;
  readonly ledger: Ledger;
  readonly ticksPerSecond: number;
}

function hatchOf(pulses: readonly Pulse[], bit: number, side: Hatch["side"]): Hatch[] {
  const pulse = pulses[bit];
  return pulse ? [{ from: pulse.low, to: pulse.fall, side }] : [];
}

/** `beaten` are the marks of the transaction whose retry this row is; its deciding bit is hatched here too. */
export function rowScene(source: RowSource, row: Row, marks: RowMarks, beaten: RowMarks | null): RowScene {
  const { scl, sda, pulses, cut } = trace(source.edges, row);
  const bytes = source.ledger.bytes(row, Math.ceil(ROW_EDGES / 18));
  const { braces, letters } = score(row, bytes, pulses);
  const startSeconds = row.startTick / source.ticksPerSecond;
  const hatches = [
    ...(marks.contest ? hatchOf(pulses, marks.contest.bit_index, "contest") : []),
    ...(beaten?.contest ? hatchOf(pulses, beaten.contest.bit_index, "retry") : []),
  ];
  return {
    index: row.index,
    span: row.endTick - row.startTick,
    scl,
    sda,
    pulses,
    braces,
    letters,
    dimensions: dimensions(row, marks, pulses, source.ticksPerSecond, startSeconds),
    hatches,
    cut: cut || (row.flags & FLAG.endsInRecord) !== 0,
  };
}
