// In: the layout, the head's rows and the person's choices. Out: the time axis: timebase, how a row's instant is found,
// and the pace of the rows (uniform, rounded, or change times only), with every assumption as a warning.

import type { Warning } from "../../../base/result";
import type { Timebase } from "../../../base/time";
import type { ReadChoices } from "../reader";
import { Cell, NUMBER, readText, scaled } from "./cell";
import { type HeadRow, trimmed } from "./dialect";
import type { Column, Layout } from "./layout";
import { type StatedTiming, statedTiming } from "./metadata";
import type { Pace } from "./rows";
import type { Clockwork } from "./scanner";

export interface Axis {
  readonly timebase: Timebase;
  readonly clock: Clockwork;
  readonly pace: Pace;
  readonly warnings: readonly Warning[];
}

/** Ticks are exact below this; picoseconds are given up for a coarser power of ten when times go past it. */
const TICK_ROOM = 2 ** 53;

/** `growth`: how many times longer the file is than the head, for an estimate of its last time. */
export function axisOf(layout: Layout, rows: readonly HeadRow[], choices: ReadChoices, growth: number): Axis {
  const column =
    layout.columns.find((one) => one.role === "time") ?? layout.columns.find((one) => one.role === "ordinal") ?? null;
  const stated = statedTiming(layout.metadata, layout.dialect.decimal);
  const readings = rows.filter((row) => row.line >= layout.firstLine && trimmed(row.cells).length >= layout.width);
  if (column === null || column.role === "ordinal") return countedAxis(layout, column, readings, stated, choices);
  return timedAxis(layout, column, readings, choices, growth);
}

interface Instants {
  /** mantissa x 10^exponent, seconds x 10^-unit. */
  readonly mantissas: number[];
  readonly exponents: number[];
  readonly rows: HeadRow[];
}

const cell = new Cell();

function instants(column: Column, layout: Layout, rows: readonly HeadRow[]): Instants {
  const found: Instants = { mantissas: [], exponents: [], rows: [] };
  for (const row of rows) {
    if (readText(cell, row.cells[column.index], layout.dialect.decimal.charCodeAt(0)) !== NUMBER) continue;
    found.mantissas.push(cell.mantissa);
    found.exponents.push(cell.exponent);
    found.rows.push(row);
  }
  return found;
}

function timedAxis(layout: Layout, column: Column, rows: readonly HeadRow[], choices: ReadChoices, growth: number): Axis {
  const warnings: Warning[] = [];
  const unitPower = column.unit?.power ?? 0;
  if (column.unit === null) {
    const name = column.name === "" ? `Column ${column.index + 1}` : `"${column.name}"`;
    warnings.push({
      code: "time-unit-assumed",
      message: `${name} is taken as the time in seconds; the file names no unit for it.`,
    });
  }
  if (choices.interval_s !== undefined) {
    warnings.push({
      code: "interval-ignored",
      message: "The file has a time column, so the given sample interval was not used.",
    });
  }
  const found = instants(column, layout, rows);
  const last = found.mantissas.length - 1;
  let power = 12;
  if (last >= 0) {
    const at = (i: number) => scaled(found.mantissas[i], found.exponents[i] + unitPower);
    const reach = Math.max(Math.abs(at(0)), Math.abs(at(0)) + Math.abs(at(last) - at(0)) * growth);
    while (power > 0 && scaled(reach, power) > TICK_ROOM) power -= 1;
    if (power < 12) {
      warnings.push({
        code: "time-coarse",
        message: `Times reach about ${reach.toPrecision(3)} s, so they are kept in steps of 1e-${power} s instead of picoseconds.`,
      });
    }
  }
  const total = unitPower + power;
  const ticks = found.mantissas.map((mantissa, i) => Math.round(scaled(mantissa, found.exponents[i] + total)));
  const grain = Math.max(
    1,
    ...found.mantissas.map((mantissa, i) => (mantissa === 0 ? 0 : scaled(1, found.exponents[i] + total))),
  );
  const pace = paceOf(ticks, grain, changing(layout, found.rows));
  if (pace.rebuilt) {
    warnings.push({
      code: "time-rebuilt",
      message: `The times are rounded to ${secondsText(grain, power)}, too coarse for the sample interval; a uniform axis of ${secondsText(pace.step ?? 0, power)} per sample was rebuilt from them.`,
    });
  }
  return {
    timebase: { ticksPerSecond: scaled(1, power), origin: "file" },
    clock: { column: column.index, power: total, factor: null, start: 0 },
    pace,
    warnings,
  };
}

function secondsText(ticks: number, power: number): string {
  return `${Number(scaled(ticks, -power).toPrecision(6))} s`;
}

function countedAxis(
  layout: Layout,
  column: Column | null,
  rows: readonly HeadRow[],
  stated: StatedTiming,
  choices: ReadChoices,
): Axis {
  const warnings: Warning[] = [];
  const interval = choices.interval_s ?? stated.interval_s;
  const origin = choices.interval_s !== undefined ? "given" : interval === null ? "assumed" : "file";
  const perSecond = interval === null ? 1 : 1e12;
  const factor = interval === null ? 1 : nearWhole(interval * perSecond);
  if (interval === null) {
    const what =
      column === null
        ? "The file has no time column and states no sample interval"
        : `Column ${column.index + 1} counts without a unit of time, and the file states no sample interval`;
    warnings.push({
      code: "interval-unknown",
      message: `${what}: times are sample numbers, and no time limit is judged. Give the sample interval to judge them.`,
    });
  } else if (choices.interval_s === undefined) {
    warnings.push({
      code: "interval-from-preamble",
      message: `The sample interval of ${Number(interval.toPrecision(9))} s was taken from the preamble (${stated.intervalText}).`,
    });
  }
  const start = interval === null ? 0 : Math.round(stated.start_s * perSecond);
  if (start !== 0 && stated.startText !== null) {
    warnings.push({
      code: "start-from-preamble",
      message: `The first sample was put at ${stated.start_s} s (preamble: ${stated.startText}).`,
    });
  }
  const clock: Clockwork = { column: column?.index ?? -1, power: 0, factor, start };
  if (column === null) {
    return { timebase: { ticksPerSecond: perSecond, origin }, clock, pace: { step: factor, rebuilt: false, grain: 1 }, warnings };
  }
  const found = instants(column, layout, rows);
  const ticks = found.mantissas.map((mantissa, i) => Math.round(scaled(mantissa, found.exponents[i]) * factor) + start);
  return {
    timebase: { ticksPerSecond: perSecond, origin },
    clock,
    pace: paceOf(ticks, factor, changing(layout, found.rows)),
    warnings,
  };
}

/** 1e-7 s in picoseconds is 100000, not 99999.99999999999. */
function nearWhole(value: number): number {
  const whole = Math.round(value);
  return Math.abs(value - whole) < 1e-9 * Math.abs(whole) ? whole : value;
}

/** Share of rows that differ from the row before in some column of levels; 0 where a column holds volts or counts. */
function changing(layout: Layout, rows: readonly HeadRow[]): number {
  const lines = layout.columns.filter((one) => one.role !== "time" && one.role !== "ordinal" && one.role !== "other");
  if (lines.some((one) => one.role === "volts" || one.role === "counts") || rows.length < 3) return 0;
  let changed = 0;
  for (let i = 1; i < rows.length; i += 1) {
    if (lines.some((one) => rows[i].cells[one.index].trim() !== rows[i - 1].cells[one.index].trim())) changed += 1;
  }
  return changed / (rows.length - 1);
}

/** A table in which nearly every row changes a level is a list of changes. */
const CHANGE_SHARE = 0.9;
const STEADY_SHARE = 0.9;

export function paceOf(ticks: readonly number[], grain: number, changed: number): Pace {
  const changesOnly: Pace = { step: null, rebuilt: false, grain };
  const n = ticks.length;
  if (n < 3)
    return n === 2 && changed === 0 && ticks[1] > ticks[0] ? { step: ticks[1] - ticks[0], rebuilt: false, grain } : changesOnly;
  if (changed >= CHANGE_SHARE) return changesOnly;
  const mean = (ticks[n - 1] - ticks[0]) / (n - 1);
  const fits = mean > 0 && ticks.every((tick, i) => Math.abs(tick - ticks[0] - i * mean) <= grain * 1.01);
  if (fits) return fitted(ticks, mean, grain);
  const steps = ticks.slice(1).map((tick, i) => tick - ticks[i]);
  const sorted = [...steps].sort((a, b) => a - b);
  const median = sorted[sorted.length >> 1];
  if (median <= 0) return changesOnly;
  const steady = steps.filter((step) => Math.abs(step - median) <= Math.max(grain * 1.01, median * 0.02)).length / steps.length;
  if (steady < STEADY_SHARE && (steady < 0.6 || changed > 0.5)) return changesOnly;
  // A repeated or doubled step within the grain is rounding, met here beside a gap that spoils the straight fit.
  const near = steps.filter((step) => Math.abs(step - median) <= Math.max(grain * 1.01, median * 0.02));
  const average = near.reduce((sum, step) => sum + step, 0) / near.length;
  return { step: grain > median * 0.25 ? average : median, rebuilt: false, grain };
}

function fitted(ticks: readonly number[], mean: number, grain: number): Pace {
  const n = ticks.length;
  const doubt = grain / (n - 1);
  const uneven = grain > mean * 0.25 && ticks.some((tick, i) => i > 0 && Math.abs(tick - ticks[i - 1] - mean) > mean * 0.25);
  return { step: simplest(mean, doubt), rebuilt: uneven, grain };
}

/** The number of fewest digits within `doubt` of `value`: a sample interval is seldom 99.9998 ns. */
function simplest(value: number, doubt: number): number {
  for (let digits = 1; digits <= 12; digits += 1) {
    const rounded = Number(value.toPrecision(digits));
    if (Math.abs(rounded - value) <= doubt) return rounded;
    const rate = 1 / Number((1 / value).toPrecision(digits));
    if (Math.abs(rate - value) <= doubt) return nearWhole(rate);
  }
  return value;
}
