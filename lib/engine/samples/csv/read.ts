// In: an opened CSV and a sink. Out: its edges, block by block, in one pass over the file, and the tail.

import { ok, type Result, refuse, type Warning } from "../../../base/result";
import { guardInflate } from "../../bytes/gzip";
import { plainChunks } from "../../bytes/text";
import type { CaptureHead, CaptureTail, EdgeSink } from "../reader";
import { Aside } from "./aside";
import { type Body, bodyReader, scanPlan } from "./body";
import { Comparator, Excursions } from "./comparator";
import { FastLevels } from "./fast";
import { timeColumnOf } from "./layout";
import { DigitalTap, isDigital, type LineSource, type Selection, select } from "./lines";
import { OwnTimeLine, OwnTimesPair, OwnTimesTaker } from "./own-times";
import { PlainRows } from "./plain-rows";
import { Rows, type RowTaker } from "./rows";
import type { FastPath } from "./scanner";
import { type LevelSource, LevelTaker, type TapLines, VoltTaker } from "./takers";
import type { JudgedLevels, LevelPlan } from "./thresholds";
import { EdgeWriter } from "./writer";

export interface BodyJob {
  readonly body: Body;
  readonly head: CaptureHead;
  readonly scl: LineSource;
  readonly sda: LineSource;
  readonly taps: readonly { readonly scl: LineSource | null; readonly sda: LineSource | null; readonly inverted: boolean }[];
  readonly levels: LevelPlan;
}

/** Bytes read before the first block of edges leaves, so that the first transactions are there at once. */
const FIRST_FLUSH = 65_536;
/** A settled sample looks back this far, in seconds (well under the shortest SCL low of Fast-mode, 1.3 us). */
const SETTLE_SECONDS = 60e-9;

/** `plain`: whether rows of a common shape may take their fast path. */
export async function readBody(job: BodyJob, sink: EdgeSink, plain: boolean): Promise<Result<CaptureTail>> {
  const { body } = job;
  const parts = assemble(job, sink);
  const { rows, writers, finish } = parts;
  const plan = scanPlan(body.layout, body.axis, parts.selection);
  const reader = bodyReader(plan, body.form, rows, plain ? (parts.fast ?? PlainRows.for(plan)) : null);
  return guardInflate(async () => {
    let read = 0;
    for await (const chunk of plainChunks(body.source.open(), body.form)) {
      const slice = read === 0 ? FIRST_FLUSH : chunk.length;
      for (let from = 0; from < chunk.length; from += slice) {
        reader.push(from === 0 && slice >= chunk.length ? chunk : chunk.subarray(from, Math.min(chunk.length, from + slice)));
        for (const writer of writers) writer.flush();
      }
      read += chunk.length;
      sink.progress(body.source.consumed?.() ?? read);
    }
    reader.finish();
    rows.finish();
    finish();
    sink.progress(body.source.consumed?.() ?? read);
    return tailOf(job, rows, parts);
  });
}

interface Parts extends Bound {
  readonly selection: Selection;
  readonly writers: readonly EdgeWriter[];
  readonly bus: EdgeWriter;
  readonly excursions: Excursions;
}

function assemble(job: BodyJob, sink: EdgeSink): Parts {
  const { body, scl, sda, levels } = job;
  const tapSources = job.taps.flatMap((tap) => [tap.scl, tap.sda]).filter((source): source is LineSource => source !== null);
  const selection = select(body.layout, [scl, sda, ...tapSources]);
  const judged = levels.judge(scl, sda);
  const volts = judged.levels === "volts";
  const bus = new EdgeWriter((block) => sink.edges(block), volts, sink.passing === true);
  const taps = job.taps.map(
    (tap, index): TapLines => ({
      scl: tap.scl === null ? null : levelSource(tap.scl, selection, levels),
      sda: tap.sda === null ? null : levelSource(tap.sda, selection, levels),
      inverted: tap.inverted,
      writer: new EdgeWriter((block) => sink.tap(index, block), false),
    }),
  );
  const excursions = new Excursions(job.head.vdd_v !== null);
  const line = busLine(job, selection, judged, excursions);
  const bound = body.layout.ownTimes ? ownTimes(line, taps, bus) : volts ? inVolts(line, taps, bus) : inLevels(line, taps, bus);
  const finish = () => {
    bound.finish();
    for (const tap of taps) tap.writer.finish();
  };
  return { ...bound, selection, writers: [bus, ...taps.map((tap) => tap.writer)], bus, excursions, finish };
}

/** What turns rows into the bus's edges, by the kind of file. */
interface Bound {
  readonly rows: Rows;
  readonly fast: FastPath | null;
  /** Where it is not the instant of the last row. */
  readonly endTick: () => number;
  readonly warnings: () => readonly Warning[];
  finish(): void;
}

interface BusLine {
  readonly job: BodyJob;
  readonly selection: Selection;
  readonly comparator: (which: "scl" | "sda") => Comparator;
}

function busLine(job: BodyJob, selection: Selection, judged: JudgedLevels, excursions: Excursions): BusLine {
  const window = windowOf(job.body);
  return {
    job,
    selection,
    comparator: (which) => new Comparator(judged[which], window, excursions.visitor(which), excursions.grazer(which)),
  };
}

function bind(line: BusLine, taker: RowTaker & { finish(): void }, fast: (rows: Rows) => FastPath | null): Bound {
  const rows = new Rows(taker, line.selection.values, line.job.body.axis.pace, new Aside());
  return { rows, fast: fast(rows), endTick: () => rows.lastTick, warnings: () => [], finish: () => taker.finish() };
}

function inLevels(line: BusLine, taps: readonly TapLines[], bus: EdgeWriter): Bound {
  const { selection, job } = line;
  const { body, scl, sda } = job;
  const taker = new LevelTaker(new DigitalTap(scl, selection), new DigitalTap(sda, selection), taps, bus);
  return bind(line, taker, (rows) => FastLevels.for(body, scl, sda, rows, taker));
}

function inVolts(line: BusLine, taps: readonly TapLines[], bus: EdgeWriter): Bound {
  const { selection, job, comparator } = line;
  const { scl, sda } = job;
  const slot = (source: LineSource) => selection.slots[source.column.index];
  const means = job.head.vdd_v !== null;
  const taker = new VoltTaker(selection.values, slot(scl), slot(sda), comparator("scl"), comparator("sda"), taps, bus, means);
  return bind(line, taker, () => null);
}

function ownTimes(line: BusLine, taps: readonly TapLines[], bus: EdgeWriter): Bound {
  const { selection, job, comparator } = line;
  const { layout, axis } = job.body;
  const of = (source: LineSource, compared: () => Comparator | null) => {
    const time = timeColumnOf(layout, source.column);
    const digital = isDigital(source) ? new DigitalTap(source, selection) : null;
    const valueSlot = selection.slots[source.column.index];
    return new OwnTimeLine(
      selection.values,
      selection.slots[time?.index ?? 0],
      valueSlot,
      digital,
      digital === null ? compared() : null,
      axis.timebase.ticksPerSecond,
    );
  };
  const tapLine = (source: LineSource | null) => (source === null ? null : of(source, () => tapComparator(source, job.levels)));
  const busPair = new OwnTimesPair(
    of(job.scl, () => comparator("scl")),
    of(job.sda, () => comparator("sda")),
    false,
    bus,
  );
  const tapPairs = job.taps.map(
    (tap, index) => new OwnTimesPair(tapLine(tap.scl), tapLine(tap.sda), tap.inverted, taps[index].writer),
  );
  const taker = new OwnTimesTaker(busPair, tapPairs);
  return { ...bind(line, taker, () => null), endTick: () => taker.endTick, warnings: () => taker.warnings() };
}

/** Null where the column's levels were not found: the line stays unknown. */
function tapComparator(source: LineSource, levels: LevelPlan): Comparator | null {
  const thresholds = levels.columns.get(source.column.index);
  return thresholds === undefined ? null : new Comparator(thresholds, 1, () => undefined);
}

function windowOf(body: Body): number {
  const { pace, timebase } = body.axis;
  if (pace.step === null || timebase.origin === "assumed") return 1;
  return Math.ceil((SETTLE_SECONDS * timebase.ticksPerSecond) / pace.step);
}

function levelSource(source: LineSource, selection: Selection, levels: LevelPlan): LevelSource {
  if (isDigital(source)) return new DigitalTap(source, selection);
  const comparator = tapComparator(source, levels);
  if (comparator === null) return { level: () => 2 };
  const slot = selection.slots[source.column.index];
  return {
    level(tick, cut) {
      if (cut) comparator.reset();
      comparator.detect(tick, selection.values[slot]);
      return comparator.level;
    },
  };
}

function tailOf(job: BodyJob, rows: Rows, parts: Parts): Result<CaptureTail> {
  const { asides } = rows;
  if (rows.count === 0 || asides.count > rows.count) {
    const first = asides.first();
    return refuse({
      code: "too-many-rows-set-aside",
      message: `${asides.count} of ${asides.count + rows.count} rows of the file cannot be used${first === null ? "" : `; line ${first.line} ${first.words}`}.`,
      advice: "Check that the export is complete and has the same columns in every row.",
      place: first === null ? {} : { line: first.line },
    });
  }
  const warnings: Warning[] = [...asides.warnings(), ...parts.warnings()];
  if (rows.cuts > 0) warnings.push(cutWarning(rows, job.head.timebase.ticksPerSecond, job.head.timebase.origin === "assumed"));
  return ok({
    endTick: parts.endTick(),
    samples: rows.count,
    sclEdges: parts.bus.sclEdges,
    sdaEdges: parts.bus.sdaEdges,
    rowsSetAside: asides.count,
    excursions: parts.excursions.list,
    excursionCount: parts.excursions.count,
    warnings,
  });
}

function cutWarning(rows: Rows, ticksPerSecond: number, sampleNumbers: boolean): Warning {
  const gap = sampleNumbers ? `${rows.cutTicks} samples` : `${Number((rows.cutTicks / ticksPerSecond).toPrecision(6))} s`;
  const places = rows.cuts === 1 ? "one place" : `${rows.cuts} places`;
  const lost = rows.lostRows > 0 ? `about ${rows.lostRows} samples are missing` : "changes are missing";
  return {
    code: "rows-lost",
    message: `The record is cut in ${places} where rows are missing, and nothing is decoded across a cut: ${lost}, first before line ${rows.cutLine} (a step of ${gap}).`,
    line: rows.cutLine,
    count: rows.cuts,
  };
}
