// In: the layout and the body from its start. Out: the level clusters of every column in volts or counts, and the trace
// of every usable channel, over as much of the file as it takes to see the bus at work.

import type { LineTrace } from "../../channels/trace";
import { Aside } from "./aside";
import type { Body } from "./body";
import { Comparator, type Thresholds } from "./comparator";
import { timeColumnOf } from "./layout";
import { type Clusters, Histogram } from "./levels";
import { DigitalTap, isDigital, type LineSource, type Selection, select } from "./lines";
import { tickOf } from "./own-times";
import { Rows, type RowTaker } from "./rows";

/** Rows that the level survey reads at least. */
const LEVEL_ROWS = 8_000;
/** Volts between the two levels of a line, at least; less is noise. */
const LEAST_VOLTS = 0.05;
/** Samples that a level must have before it counts as seen. */
const LEVEL_SAMPLES = 24;

/** Histograms per column; reads until two columns have shown both levels, or to the end. Keyed by column index. */
export async function surveyLevels(body: Body, sources: readonly LineSource[]): Promise<Map<number, Clusters | null>> {
  const wanted = sources.filter((source) => !isDigital(source) && source.channel.kind !== "other");
  const found = new Map<number, Clusters | null>();
  if (wanted.length === 0) return found;
  const selection = select(body.layout, wanted);
  const histograms = wanted.map(() => new Histogram());
  let rows = 0;
  const taker: RowTaker = {
    take() {
      rows += 1;
      for (let i = 0; i < histograms.length; i += 1) histograms[i].add(selection.values[i]);
    },
    orderLost: () => false,
  };
  let due = LEVEL_ROWS;
  const enough = () => {
    if (rows < due) return false;
    due = rows * 2;
    const seen = histograms.filter((histogram) => histogram.clusters(LEVEL_SAMPLES) !== null).length;
    return seen >= Math.min(2, wanted.length);
  };
  await body.walk(selection, new Rows(taker, selection.values, body.axis.pace, new Aside()), enough);
  const clusters = histograms.map((histogram) => histogram.clusters(1));
  const widest = Math.max(0, ...clusters.map((one) => (one === null ? 0 : one.high - one.low)));
  for (let i = 0; i < wanted.length; i += 1) {
    const one = clusters[i];
    found.set(wanted[i].column.index, one !== null && swings(one, wanted[i], widest) ? one : null);
  }
  return found;
}

/** Noise on a quiet line has two clusters too, but a tiny part of a real swing or of its own level apart. */
function swings(one: Clusters, source: LineSource, widest: number): boolean {
  const swing = one.high - one.low;
  const level = Math.max(Math.abs(one.high), Math.abs(one.low));
  const volts = source.channel.kind === "volts";
  if (volts && source.column.unit !== null && swing < LEAST_VOLTS) return false;
  return swing >= widest * 0.15 && swing >= level * (volts ? 0.1 : 0.02);
}

/** Changes that a survey keeps of one line. */
const TRACE_LIMIT = 1 << 20;

class TraceLine {
  initial: 0 | 1 | 2 = 2;
  length = 0;
  firstTick = Number.POSITIVE_INFINITY;
  private level = -1;
  private ticks = new Float64Array(1024);
  private levels = new Uint8Array(1024);
  private timeSlot = -1;
  private ticksPerSecond = 1;
  private newest = Number.NEGATIVE_INFINITY;

  constructor(
    readonly source: LineSource,
    private readonly digital: DigitalTap | null,
    private readonly comparator: Comparator | null,
    private readonly selection: Selection,
  ) {}

  /** The line goes by a time column of its own. */
  by(timeSlot: number, ticksPerSecond: number): this {
    this.timeSlot = timeSlot;
    this.ticksPerSecond = ticksPerSecond;
    return this;
  }

  take(row: number, cut: boolean): void {
    let level = 2;
    const tick = this.timeSlot < 0 ? row : tickOf(this.selection.values[this.timeSlot], this.ticksPerSecond);
    if (Number.isNaN(tick) || tick < this.newest) return;
    if (this.newest === Number.NEGATIVE_INFINITY) this.firstTick = tick;
    this.newest = tick;
    let at = tick;
    if (this.digital !== null) level = this.digital.level();
    else if (this.comparator !== null) {
      if (cut) this.comparator.reset();
      if (this.comparator.detect(tick, this.selection.values[this.selection.slots[this.source.column.index]]))
        at = this.comparator.eventTick;
      level = this.comparator.level;
    }
    if (level === this.level) return;
    if (this.level < 0) this.initial = level as 0 | 1 | 2;
    else this.put(at, level);
    this.level = level;
  }

  private put(tick: number, level: number): void {
    if (this.length === TRACE_LIMIT) return;
    if (this.length === this.ticks.length) {
      const ticks = new Float64Array(this.length * 2);
      ticks.set(this.ticks);
      this.ticks = ticks;
      const levels = new Uint8Array(this.length * 2);
      levels.set(this.levels);
      this.levels = levels;
    }
    this.ticks[this.length] = tick;
    this.levels[this.length] = level;
    this.length += 1;
  }

  /** Takes a change of level at `tick` back. */
  retract(tick: number): void {
    if (this.firstTick === tick) {
      this.firstTick = Number.POSITIVE_INFINITY;
      this.newest = Number.NEGATIVE_INFINITY;
      this.level = -1;
      return;
    }
    this.newest = this.firstTick;
    if (this.length === 0 || this.ticks[this.length - 1] !== tick) return;
    this.length -= 1;
    this.level = this.length === 0 ? this.initial : this.levels[this.length - 1];
  }

  trace(): LineTrace {
    const { channel } = this.source;
    return {
      id: channel.id,
      name: channel.name,
      initial: this.initial,
      length: this.length,
      ticks: this.ticks,
      levels: this.levels,
    };
  }

  get full(): boolean {
    return this.length === TRACE_LIMIT;
  }
}

/** Changes of a pair of lines after which the survey asks for the first time whether they suffice. */
const FIRST_CHANGES = 400;

export interface Surveyed {
  readonly rows: number;
  readonly firstTick: number;
  readonly asides: Aside;
}

/**
 * Traces of every usable channel. `settled` is asked ever more rarely (each time four times as many changes are there)
 * whether the traces answer the question; the walk ends when they do, at the end of the file, or when a trace is full.
 */
export async function surveyTraces(
  body: Body,
  sources: readonly LineSource[],
  thresholds: ReadonlyMap<number, Thresholds>,
  settled: (traces: readonly LineTrace[]) => boolean,
): Promise<Surveyed> {
  const selection = select(body.layout, sources);
  const lineOf = (source: LineSource) => {
    if (isDigital(source)) return new TraceLine(source, new DigitalTap(source, selection), null, selection);
    const levels = thresholds.get(source.column.index);
    return new TraceLine(source, null, levels === undefined ? null : new Comparator(levels, 1, () => undefined), selection);
  };
  const lines = sources.map((source) => {
    const time = body.layout.ownTimes ? timeColumnOf(body.layout, source.column) : null;
    return lineOf(source).by(time === null ? -1 : selection.slots[time.index], body.axis.timebase.ticksPerSecond);
  });
  const taker: RowTaker = {
    take(tick, cut) {
      for (const line of lines) line.take(tick, cut);
    },
    orderLost: () => false,
    retract(tick) {
      if (!sources.every(isDigital)) return false;
      for (const line of lines) line.retract(tick);
      return true;
    },
  };
  let target = FIRST_CHANGES;
  let last = false;
  const traces = () => lines.map((line) => line.trace());
  const enough = () => {
    const total = lines.reduce((sum, line) => sum + line.length, 0);
    if (lines.some((line) => line.full)) return true;
    if (total < target) return false;
    target = total * 4;
    last = settled(traces());
    return last;
  };
  const asides = new Aside();
  const rows = new Rows(taker, selection.values, body.axis.pace, asides);
  await body.walk(selection, rows, enough);
  if (!last) settled(traces());
  return {
    rows: rows.count,
    firstTick: Math.min(...lines.map((line) => line.firstTick), rows.count === 0 ? 0 : Number.POSITIVE_INFINITY),
    asides,
  };
}
