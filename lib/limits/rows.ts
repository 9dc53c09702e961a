// In: the columns of a capture and the profile it is judged by. Out: one row per parameter, with a verdict, in seconds.

import { seconds, type Timebase } from "../base/time";
import { biasNs } from "./bias";
import type { Column, Extreme } from "./column";
import { type ColumnSet, columnsOf } from "./columns";
import type { EdgePoints } from "./edges";
import type { Judge, Worst } from "./judge";
import type { Measured } from "./measure";
import * as P from "./parameters";
import { listedAs, type Parameter } from "./parameters";
import type { LimitTable, Profile } from "./profile";
import { SOURCES } from "./published/sources";
import { boundsNs, ticksOfNs } from "./ticks";

/**
 * too-close: nothing certainly broken, but something nearer to its limit than the uncertainty, or a pass of a one-threshold
 * capture nearer to a least value than its bias (bias.ts). not-measurable: a logic-level capture cannot show it. not-seen: it did
 * not occur. no-limit: the profile sets none, or the time base is assumed.
 */
export type RowVerdict = "pass" | "fail" | "too-close" | "not-measurable" | "not-seen" | "no-limit";

/** Times in seconds, null where there is none. A frequency is given as its period. */
export interface MeasurementRow {
  readonly symbol: string;
  /** "Hs" between an Hs controller code and its STOP. */
  readonly traffic: "F/S" | "Hs";
  readonly count: number;
  readonly min: number | null;
  readonly p1: number | null;
  readonly p50: number | null;
  readonly p99: number | null;
  readonly max: number | null;
  readonly limitMin: number | null;
  readonly limitMax: number | null;
  readonly below: number;
  readonly above: number;
  readonly uncertain: number;
  /** Passes that one threshold cannot prove: nearer to the least value than `bias`. Beyond 4096 intervals within 1/64 octave. */
  readonly unproven: number;
  readonly verdict: RowVerdict;
  readonly uncertainty: number;
  /** The most by which one threshold over-reports this interval on edges that the profile allows; 0 in volts. */
  readonly bias: number;
  readonly points: string;
  /** Document, revision and table of the limit; empty where there is none. */
  readonly clause: string;
  readonly note: string;
  /** Samples per second that would judge this limit within a tenth, where this capture is too slow for it; else null. */
  readonly needsRate: number | null;
  readonly distribution: readonly (readonly [number, number])[];
  /** Extreme occurrences: the smallest, and the largest. */
  readonly smallest: Place | null;
  readonly largest: Place | null;
  readonly violations: readonly Violated[];
}

export interface Place {
  readonly transaction: number | null;
  readonly at: number;
  readonly measured: number;
}

export interface Violated extends Place {
  readonly limit: number;
  readonly side: "min" | "max";
  readonly severity: number;
}

/** A limit is judged within a tenth by samples this many times finer (REFERENCE 7). */
const FINER = 10;

/** @param profile the profile judged by and its place among those tried; null judges nothing */
export function measurementRows(
  measured: Measured,
  chosen: { profile: Profile; index: number } | null,
  volts: boolean,
): MeasurementRow[] {
  const rows = rowsOf(
    measured,
    measured.fs,
    "F/S",
    chosen === null ? null : { table: chosen.profile.limits, index: chosen.index },
    volts,
  );
  if (measured.hs === null) return rows;
  const hsRows = rowsOf(measured, measured.hs, "Hs", chosen === null ? null : { table: chosen.profile.hs, index: 0 }, volts);
  return (chosen?.profile.base ?? chosen?.profile.name) === "High-speed" ? [...hsRows, ...rows] : [...rows, ...hsRows];
}

interface By {
  readonly table: LimitTable;
  readonly index: number;
}

const PARAMETERS: readonly Parameter[] = [
  ...[P.PERIOD, P.LOW, P.HIGH, P.HD_STA, P.SU_STA, P.SU_STO, P.BUF, P.SU_DAT, P.HD_DAT, P.VD_DAT, P.VD_ACK],
  ...[P.RISE, P.FALL, ...Object.values(P.HS_EDGES), P.SPIKE, P.TIMEOUT],
];

function rowsOf(measured: Measured, set: ColumnSet, traffic: "F/S" | "Hs", by: By | null, volts: boolean): MeasurementRow[] {
  const columns = columnsOf(set).filter((column) => column !== set.slow);
  const rows: MeasurementRow[] = [];
  for (const parameter of PARAMETERS) {
    const column = columns.find((candidate) => candidate.symbol === parameter.symbol);
    if (column === undefined) continue;
    const limited = by !== null && listedAs(parameter.symbol, by.table) !== null;
    if (column.count === 0 && !limited) continue;
    rows.push(rowOf(column, parameter, { measured, traffic, by, volts, floor: column === set.period ? set.slow : null }));
  }
  return rows;
}

interface Context {
  readonly measured: Pick<Measured, "base" | "doubt" | "edges">;
  readonly traffic: "F/S" | "Hs";
  readonly by: By | null;
  readonly volts: boolean;
  /** A second column that judges the longest periods. */
  readonly floor: Column | null;
}

export function rowOf(column: Column, parameter: Parameter, context: Context): MeasurementRow {
  const { by, measured, volts } = context;
  const { base } = measured;
  const symbol = (by !== null ? listedAs(parameter.symbol, by.table) : null) ?? parameter.symbol;
  const limit = by === null ? null : (by.table[symbol] ?? null);
  const bounds = limit === null ? { min: null, max: null } : boundsNs(symbol, limit);
  const judges = by === null ? [] : [column.judgeOf(by.index), context.floor?.judgeOf(by.index) ?? null].filter(isJudge);
  const total = (count: (judge: Judge) => number) => judges.reduce((sum, judge) => sum + count(judge), 0);
  const below = total((judge) => judge.below);
  const above = total((judge) => judge.above);
  const uncertain = total((judge) => judge.uncertain);
  const at = (share: number) => (column.count === 0 ? null : seconds(column.quantile(share), base));
  const limitMin = bounds.min === null ? null : bounds.min / 1e9;
  const limitMax = bounds.max === null ? null : bounds.max / 1e9;
  const measurable = volts || !parameter.volts;
  const biased = volts || by === null ? 0 : biasNs(parameter.symbol, by.table);
  const least = bounds.min === null ? null : ticksOfNs(bounds.min, base);
  const within = least === null || biased === 0 ? null : least + ticksOfNs(biased, base) + measured.doubt;
  const unproven = within === null ? 0 : Math.max(0, column.countBelow(within) - below - uncertain);
  const nearest = seconds(Math.min(...judges.map((judge) => judge.nearest)), base);
  const needsRate = measurable ? neededRate(limitMin, limitMax, seconds(measured.doubt, base), nearest) : null;
  return {
    symbol,
    traffic: context.traffic,
    count: column.count,
    min: column.count === 0 ? null : seconds(column.min, base),
    p1: at(0.01),
    p50: at(0.5),
    p99: at(0.99),
    max: column.count === 0 ? null : seconds(column.max, base),
    limitMin,
    limitMax,
    below,
    above,
    uncertain,
    unproven,
    verdict: verdictOf(column.count, !measurable, limitMin === null && limitMax === null, below + above, uncertain + unproven),
    uncertainty: seconds(measured.doubt, base),
    bias: limitMin === null ? 0 : biased / 1e9,
    points: pointsOf(parameter, measured.edges),
    clause: limit === null ? "" : clauseOf(limit.source),
    note: noteOf(limit?.note ?? "", parameter, volts, limitMin !== null && biased > 0),
    needsRate,
    distribution: column.distribution().map(([from, count]) => [seconds(from, base), count] as const),
    smallest: column.count === 0 ? null : place(column.smallest(), base),
    largest: column.count === 0 ? null : place(column.largest(), base),
    violations: judges.flatMap((judge) => judge.worst()).map((worst) => violated(worst, base, limitMin ?? 0, limitMax ?? 0)),
  };
}

function pointsOf(parameter: Parameter, { words }: EdgePoints): string {
  if (words === null || (parameter !== P.RISE && parameter !== P.FALL)) return parameter.points;
  return parameter === P.RISE ? words.rise : words.fall;
}

/** A limit's source as people cite it: revisions that agree are one document, device sheets go by their titles. */
function clauseOf(source: string): string {
  return source
    .split("; ")
    .map((part) => {
      const [id, ...rest] = part.split(" ");
      const title = id === "UM10204r6+r7" ? "UM10204" : SOURCES[id]?.title;
      return title === undefined ? part : [title, ...rest].join(" ");
    })
    .join("; ");
}

function isJudge(judge: Judge | null): judge is Judge {
  return judge !== null;
}

function verdictOf(count: number, needsVolts: boolean, noLimit: boolean, broken: number, close: number): RowVerdict {
  if (needsVolts && count === 0) return "not-measurable";
  if (count === 0) return "not-seen";
  if (noLimit) return "no-limit";
  if (broken > 0) return "fail";
  return close > 0 ? "too-close" : "pass";
}

/**
 * A limit is judged within a tenth by samples ten times finer than it (REFERENCE 7). Where that is so already, what would part
 * the nearest uncertain value from its limit; twice the present rate at least.
 */
function neededRate(min: number | null, max: number | null, doubt: number, nearest: number): number | null {
  const limits = [min, max].filter((limit): limit is number => limit !== null && limit > 0);
  if (limits.length === 0 || doubt === 0) return null;
  const tightest = Math.min(...limits);
  const uncertain = Number.isFinite(nearest);
  if (!uncertain && doubt < tightest) return null;
  if (doubt > tightest / FINER) return FINER / tightest;
  return Math.max(2 / doubt, nearest > 0 ? 1 / nearest : 0);
}

function noteOf(published: string, parameter: Parameter, volts: boolean, biased: boolean): string {
  const notes = published === "" ? [] : [published];
  if (parameter.volts && !volts)
    notes.push("A logic-level capture cannot show the shape of an edge: record volts to measure this.");
  else if (biased)
    notes.push(
      "One threshold over-reports this interval by part of its edges: a fail stands, a pass nearer to the limit than that is no proof. Record volts to prove it, or judge by a profile with the tr and tf of this bus.",
    );
  else if (!volts && /^tVD/.test(parameter.symbol))
    notes.push("One threshold may show this by part of an edge too long or too short.");
  return notes.map((note) => (/[.!?]$/.test(note) ? note : `${note}.`)).join(" ");
}

function place(extreme: Extreme, base: Timebase): Place {
  const { measured, tick, transaction } = extreme;
  return { transaction: transaction < 0 ? null : transaction, at: seconds(tick, base), measured: seconds(measured, base) };
}

function violated(worst: Worst, base: Timebase, limitMin: number, limitMax: number): Violated {
  return { ...place(worst, base), limit: worst.side === "min" ? limitMin : limitMax, side: worst.side, severity: worst.severity };
}
