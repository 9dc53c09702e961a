// In: a CSV, already inflated, and the person's choices. Out: the opened capture, or the question or refusal that stands
// in its way. Head by papaparse, a survey for levels and channels, then the body in one pass.

import { ok, type Problem, type Result, refuse, type Warning } from "../../base/result";
import { firstBytes, guardInflate } from "../bytes/gzip";
import type { ByteSource } from "../bytes/source";
import { decode, type Encoding, plainChunks, plainEncoding, textForm } from "../bytes/text";
import { needsMore, type Proposal, proposeChannels } from "../channels/propose";
import type { LineTrace } from "../channels/trace";
import { axisOf } from "./csv/axis";
import { backwardsTime } from "./csv/backwards";
import { type Body, bodyOf } from "./csv/body";
import { findDialect, type HeadRow } from "./csv/dialect";
import { type Layout, layoutOf } from "./csv/layout";
import { type LineSource, lineSources, usable } from "./csv/lines";
import { readBody } from "./csv/read";
import { surveyLevels, surveyTraces } from "./csv/survey";
import { type LevelPlan, levelPlan, thresholdsOf } from "./csv/thresholds";
import type { CaptureHead, CaptureTail, EdgeSink, OpenCapture, ReadChoices } from "./reader";

/** Bytes of the file by which the dialect is judged. */
export const HEAD_BYTES = 65_536;

/** A CSV as far as it is understood; also what a preview shows when the lines are not found. */
export interface CsvView {
  readonly rows: readonly HeadRow[];
  readonly encoding: Encoding;
  readonly layout: Layout;
  readonly sources: readonly LineSource[];
  readonly warnings: readonly Warning[];
  /** The finder's answer, or why there is none. */
  readonly proposal: Result<Proposal>;
}

export interface OpenedCsv extends OpenCapture {
  readonly view: CsvView;
  /** Reads without the fast paths: what they are compared with. */
  readGeneral(sink: EdgeSink): Promise<Result<CaptureTail>>;
}

export type CsvOutcome = { readonly view: CsvView | null; readonly opened: Result<OpenedCsv> };

export async function openCsv(source: ByteSource, choices: ReadChoices, gzip: boolean): Promise<Result<OpenedCsv>> {
  return (await examineCsv(source, choices, gzip)).opened;
}

export async function examineCsv(source: ByteSource, choices: ReadChoices, gzip: boolean): Promise<CsvOutcome> {
  let view: CsvView | null = null;
  const opened = await guardInflate(async () => {
    const head = await firstBytes(source, HEAD_BYTES);
    if (!head.ok) return head;
    const form = textForm(head.value);
    const whole = head.value.length < HEAD_BYTES;
    const text = await plainText(head.value, form);
    const table = findDialect(text, whole);
    if (!table.ok) return table;
    const layout = layoutOf(table.value);
    const backwards = backwardsTime(layout, table.value.rows);
    if (backwards !== null) return refuse(backwards);
    const axis = axisOf(layout, table.value.rows, choices, growthOf(source, head.value.length));
    const sources = lineSources(layout);
    const body = bodyOf(source, form, layout, axis);
    const found = await findLines(body, sources, choices);
    if (!found.ok) return found;
    const { proposal, levels, startTick } = found.value;
    const warnings = [...layoutWarnings(layout, sources), ...axis.warnings];
    view = { rows: table.value.rows, encoding: form.encoding, layout, sources, warnings, proposal };
    if (!proposal.ok) return proposal;
    return openFound(body, sources, choices, gzip, proposal.value, levels, startTick, view);
  });
  return { view, opened };
}

async function plainText(head: Uint8Array, form: ReturnType<typeof textForm>): Promise<string> {
  async function* once(): AsyncGenerator<Uint8Array> {
    yield head;
  }
  let text = "";
  for await (const part of plainChunks(once(), form)) text += decode(part, plainEncoding(form));
  return text;
}

function growthOf(source: ByteSource, headBytes: number): number {
  if (source.size === null) return headBytes < HEAD_BYTES ? 1 : 1000;
  return Math.max(1, source.size / Math.max(1, headBytes));
}

function layoutWarnings(layout: Layout, sources: readonly LineSource[]): Warning[] {
  const warnings: Warning[] = [];
  if (!layout.named)
    warnings.push({ code: "no-header", message: "The file has no header row; columns are named by their number." });
  const guessed = sources.filter((source) => source.channel.kind === "volts" && source.column.unit === null);
  if (guessed.length > 0) {
    const names = guessed.map((source) => source.channel.name || source.channel.id).join(", ");
    warnings.push({
      code: "volts-assumed",
      message: `The readings of ${names} are taken as volts; the file names no unit for them.`,
    });
  }
  return warnings;
}

interface Found {
  readonly proposal: Result<Proposal>;
  readonly levels: LevelPlan;
  readonly startTick: number;
}

async function findLines(body: Body, sources: readonly LineSource[], choices: ReadChoices): Promise<Result<Found>> {
  const lines = sources.filter(usable);
  const clusters = await surveyLevels(body, lines);
  const levels = levelPlan(lines, clusters, choices);
  const channels = sources.map((source) => source.channel);
  let proposal: Result<Proposal> = proposeChannels([], channels, choices);
  const settled = (traces: readonly LineTrace[]) => {
    proposal = proposeChannels(traces, channels, choices);
    return !needsMore(proposal);
  };
  const surveyed = await surveyTraces(body, lines, thresholdsOf(levels), settled);
  if (surveyed.rows === 0) return refuse(nothingSensible(surveyed.asides.count, surveyed.asides.first()));
  return ok({ proposal, levels, startTick: surveyed.firstTick });
}

export function nothingSensible(count: number, first: { readonly line: number; readonly words: string } | null): Problem {
  return {
    code: "no-usable-rows",
    message: `No row of the file can be used: ${count} rows were set aside${first === null ? "" : `; line ${first.line} ${first.words}`}.`,
    advice: "Check that the export is complete and has the same columns in every row.",
    place: first === null ? {} : { line: first.line },
  };
}

function openFound(
  body: Body,
  sources: readonly LineSource[],
  choices: ReadChoices,
  gzip: boolean,
  proposal: Proposal,
  levels: LevelPlan,
  startTick: number,
  view: CsvView,
): Result<OpenedCsv> {
  const pick = (id: string) => sources.find((source) => source.channel.id === id);
  const scl = pick(proposal.scl);
  const sda = pick(proposal.sda);
  if (scl === undefined || sda === undefined) throw new Error("the channel finder proposed a channel that is not in the file");
  const taps = resolveTaps(sources, choices);
  if (!taps.ok) return taps;
  const judged = levels.judge(scl, sda);
  const head: CaptureHead = {
    format: "csv",
    levels: judged.levels,
    gzip,
    timebase: body.axis.timebase,
    startTick,
    sampleTicks: body.axis.sampleTicks,
    channels: sources.map((source) => source.channel),
    proposal: { scl: proposal.scl, sda: proposal.sda, basis: proposal.basis, reason: proposal.reason },
    taps: choices.taps ?? [],
    vdd_v: judged.vdd_v,
    vil_v: judged.vil_v,
    vih_v: judged.vih_v,
    warnings: [...view.warnings, ...judged.warnings, ...proposal.warnings],
    metadata: body.layout.metadata,
  };
  const job = { body, head, scl, sda, taps: taps.value, levels };
  return ok({
    head,
    view,
    read: (sink) => readBody(job, sink, true),
    readGeneral: (sink) => readBody(job, sink, false),
  });
}

export interface ResolvedTap {
  readonly scl: LineSource | null;
  readonly sda: LineSource | null;
  readonly inverted: boolean;
}

/** A tap's names, found as a person's choice is: by "@N", or by a header cell that stands once. */
function resolveTaps(sources: readonly LineSource[], choices: ReadChoices): Result<ResolvedTap[]> {
  const resolved: ResolvedTap[] = [];
  for (const tap of choices.taps ?? []) {
    const scl = resolveName(sources, tap.scl, tap.label);
    if (!scl.ok) return scl;
    const sda = resolveName(sources, tap.sda, tap.label);
    if (!sda.ok) return sda;
    resolved.push({ scl: scl.value, sda: sda.value, inverted: tap.polarity === "drive" });
  }
  return ok(resolved);
}

function resolveName(sources: readonly LineSource[], name: string | null, label: string): Result<LineSource | null> {
  if (name === null) return ok(null);
  const exact = sources.filter((source) => source.channel.id === name || source.channel.name === name);
  const found = exact.length > 0 ? exact : sources.filter((source) => source.channel.name.toLowerCase() === name.toLowerCase());
  if (found.length === 1 && usable(found[0])) return ok(found[0]);
  const offered = sources
    .map((source) => (source.channel.name === "" ? source.channel.id : `${source.channel.name} (${source.channel.id})`))
    .join(", ");
  const what = found.length === 0 ? "is no column of the file" : found.length > 1 ? "names several columns" : "holds no levels";
  return refuse({
    code: found.length > 1 ? "channel-ambiguous" : "channel-unknown",
    message: `The tap ${label} asks for "${name}", which ${what}.`,
    advice: `Columns are: ${offered}. Name one by its header cell or by @N.`,
    place: {},
  });
}
