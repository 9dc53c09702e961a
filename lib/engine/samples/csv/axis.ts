// In: the layout, the head's rows and the person's choices. Out: the time axis: timebase, how a row's instant is found,
// and the pace of the rows (uniform, rounded, or change times only), with every assumption as a warning.

import type { Warning } from "../../../base/result";
import type { Timebase } from "../../../base/time";
import type { ReadChoices } from "../reader";
import { Cell, NUMBER, readText, scaled } from "./cell";
import { type HeadRow, trimmed } from "./dialect";
import type { Column, Layout } from "./layout";
import { type StatedTiming, statedTiming } from "./metadata";
import type { Clockwork } from "./plan";
import type { Pace } from "./rows";

export interface Axis {
  readonly timebase: Timebase;
  readonly clock: Clockwork;
  readonly pace: Pace;
  /** Ticks between samples for the head; null for change times only. */
  readonly sampleTicks: number | null;
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
  const axis = timedAxis(layout, column, readings, choices, growth);
  return layout.ownTimes ? ownAxis(axis) : axis;
}

/** Rows of channels with their own times are only numbered; each line keeps its own instants. */
function ownAxis(axis: Axis): Axis {
  const warning: Warning = {
    code: "own-times",
    message: "Each channel has a time column of its own; their samples were merged by time.",
  };
  return {
    ...axis,
    clock: { column: -1, power: 0, factor: 1, start: 0 },
    pace: { step: null, rebuilt: false, grain: 1, relative: 0 },
    warnings: [...axis.warnings, warning],
  };
}

function sampleTicksOf(pace: Pace): number | null {
  return pace.step === null ? null : Math.round(pace.step);
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
    const reach = reachOf(found, unitPower, growth);
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
  const relative = fixedDigits(found);
  const reach = reachOf(found, unitPower, growth);
  const pace = withDigits(paceOf(ticks, grain, changing(layout, found.rows)), relative, scaled(reach, power));
  if (pace.rebuilt) {
    const coarsest = Math.max(grain, scaled(reach, power) * relative);
    warnings.push({
      code: "time-rebuilt",
      message: `The times are rounded to ${secondsText(coarsest, power)}, too coarse for the sample interval; a uniform axis of ${secondsText(pace.step ?? 0, power)} per sample was rebuilt from them.`,
    });
  }
  return {
    timebase: { ticksPerSecond: scaled(1, power), origin: "file" },
    clock: { column: column.index, power: total, factor: null, start: 0 },
    pace,
    sampleTicks: sampleTicksOf(pace),
    warnings,
  };
}

/** Largest time of the file in seconds, estimated from how far the head gets. */
function reachOf(found: Instants, unitPower: number, growth: number): number {
  if (found.mantissas.length === 0) return 0;
  const at = (i: number) => scaled(found.mantissas[i], found.exponents[i] + unitPower);
  const span = at(found.mantissas.length - 1) - at(0);
  return Math.max(Math.abs(at(0)), Math.abs(at(0) + span * growth));
}

/** Times of a fixed number of digits with exponents (9.99E-06, 1.00E-05): one unit of the last digit, as part of the time. */
function fixedDigits(found: Instants): number {
  const filled = found.mantissas
    .map((mantissa, i) => ({ mantissa, exponent: found.exponents[i] }))
    .filter((one) => one.mantissa !== 0);
  if (filled.length < 3 || filled.every((one) => one.exponent === filled[0].exponent)) return 0;
  const digits = Math.max(...filled.map((one) => String(Math.abs(one.mantissa)).length));
  const fixed = filled.filter((one) => String(Math.abs(one.mantissa)).length === digits).length;
  return fixed >= filled.length * 0.9 ? scaled(1, 1 - digits) : 0;
}

/** Times that start fine and grow coarser than the step are rebuilt from the first row on. */
function withDigits(pace: Pace, relative: number, reach: number): Pace {
  if (relative === 0 || pace.step === null) return pace;
  return { ...pace, relative, rebuilt: pace.rebuilt || reach * relative > pace.step * 0.25 };
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
    return {
      timebase: { ticksPerSecond: perSecond, origin },
      clock,
      pace: { step: factor, rebuilt: false, grain: 1, relative: 0 },
      sampleTicks: Math.round(factor),
      warnings,
    };
  }
  const found = instants(column, layout, rows);
  const ticks = found.mantissas.map((mantissa, i) => Math.round(scaled(mantissa, found.exponents[i]) * factor) + start);
  const pace = paceOf(ticks, factor, changing(layout, found.rows));
  return { timebase: { ticksPerSecond: perSecond, origin }, clock, pace, sampleTicks: sampleTicksOf(pace), warnings };
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
  const changesOnly: Pace = { step: null, rebuilt: false, grain, relative: 0 };
  const n = ticks.length;
  if (n < 3)
    return n === 2 && changed === 0 && ticks[1] > ticks[0]
      ? { step: ticks[1] - ticks[0], rebuilt: false, grain, relative: 0 }
      : changesOnly;
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
  return { step: grain > median * 0.25 ? average : median, rebuilt: false, grain, relative: 0 };
}

function fitted(ticks: readonly number[], mean: number, grain: number): Pace {
  const n = ticks.length;
  const doubt = grain / (n - 1);
  const uneven = grain > mean * 0.25 && ticks.some((tick, i) => i > 0 && Math.abs(tick - ticks[i - 1] - mean) > mean * 0.25);
  return { step: simplest(mean, doubt), rebuilt: uneven, grain, relative: 0 };
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
