// In: an opened capture and the person's settings. Out: everything concluded from it. The whole staircase in one place: edges are
// decoded, measured, watched by the rules and by forensics while they are read; nothing holds the file.

import { judgeable, seconds } from "../base/time";
import { createDecoder } from "../engine/decode";
import type { CaptureHead, CaptureTail, Channel, OpenCapture } from "../engine/samples/reader";
import type { ForensicsOutcome } from "../forensics/contract";
import { createForensics } from "../forensics/forensics";
import { createMeasurement, type Measured } from "../limits/measure";
import type { Profile } from "../limits/profile";
import type { MeasurementRow } from "../limits/rows";
import type { AnalysisListener, AnalysisOutcome, AnalysisSettings } from "./analysis";
import { grainOf } from "./grain";
import { type Chosen, chosenProfile, highSpeedLimits, judgedRows, measurementsOf, triedProfiles, violationsOf } from "./judge";
import { ledeOf } from "./lede";
import { levelsOf } from "./levels";
import { resolveProfile } from "./profile-file";
import { REPORT_SCHEMA, type Summary } from "./report";
import { RuleBook } from "./rulebook";
import { withRunts } from "./runts";
import { verdictOf } from "./verdict";

/** Analyses one capture. Rejects only where the listener threw (a cancelled run) or we are at fault. */
export async function analyze(
  opened: OpenCapture,
  settings: AnalysisSettings,
  listener: AnalysisListener,
): Promise<AnalysisOutcome> {
  const { head } = opened;
  const asked = resolveProfile(settings.limits, settings.cb_pf);
  if (!asked.ok) return asked;
  const tried = triedProfiles(head, asked.value, settings.cb_pf);
  const measurement = createMeasurement(head, tried, highSpeedLimits(tried));
  const forensics = createForensics(head, head.taps, { roster: settings.roster, log: settings.log });
  const book = new RuleBook(head);
  const decoder = createDecoder(head, {
    bits(block) {
      measurement.bits(block);
      book.bits(block);
      forensics.bits(block);
    },
    transactions(block, bytes) {
      book.transactions(block, bytes);
      forensics.transactions(block, bytes);
      listener.transactions(block, bytes);
    },
    spike(spike) {
      measurement.spike(spike);
      book.spike(spike);
    },
    remnant: (remnant) => book.remnant(remnant),
  });
  const grained = grainOf(head);
  listener.head(head);
  const read = await opened.read({
    // The rules look at the newest block only; of earlier ones they keep what they need.
    passing: listener.passing,
    edges(block) {
      book.edges(block);
      decoder.push(grained(block));
      listener.edges(block);
    },
    tap(index, block) {
      forensics.tap(index, block);
      listener.tap(index, block);
    },
    progress: (bytes) => listener.progress(bytes),
  });
  if (!read.ok) return read;
  const tail = read.value;
  decoder.finish(tail.endTick);
  const concluded = forensics.conclude(tail.endTick);
  const { measured } = measurement;
  const chosen = chosenProfile(measured, tried, settings.cb_pf);
  const rows = judgedRows(measured, chosen, head.levels === "volts", concluded.stretches, (transaction) =>
    book.places.opening(transaction),
  );
  const outcome = { ...concluded, stretches: withRunts(concluded.stretches, rows) };
  const { lookAlikes, stretches } = outcome;
  book.conclude({ head, tail, rows, profile: chosen?.profile ?? null, lookAlikes, stretches });
  const summary = summaryOf({
    head,
    tail,
    outcome,
    rows,
    chosen,
    book,
    asked: asked.value,
    measured,
    roster: settings.roster,
  });
  return { ok: true, summary, attribution: outcome.attribution };
}

interface Concluded {
  readonly head: CaptureHead;
  readonly tail: CaptureTail;
  readonly outcome: ForensicsOutcome;
  readonly rows: readonly MeasurementRow[];
  readonly chosen: Chosen | null;
  readonly book: RuleBook;
  readonly asked: Profile | null;
  readonly measured: Measured;
  readonly roster: AnalysisSettings["roster"];
}

function summaryOf({ head, tail, outcome, rows, chosen, book, asked, measured, roster }: Concluded): Summary {
  const { faults, totals } = book;
  const judged = judgeable(head.timebase);
  const profile = chosen?.profile ?? asked;
  const summary: Omit<Summary, "lede"> = {
    schema: REPORT_SCHEMA,
    capture: captureOf(head, tail, book),
    transactionCount: book.places.count,
    stretches: [...outcome.stretches],
    contests: [...outcome.contests],
    faults: faults(),
    measurements: measurementsOf(rows),
    violations: violationsOf(rows),
    controllers: [...outcome.controllers],
    limits: {
      profile: profile?.name ?? "none",
      source: judged ? (profile?.source ?? "") : "not judged: the time base is assumed",
      version: profile?.version ?? 1,
      base: profile?.base ?? null,
    },
    verdict: verdictOf(rows, totals(), judged, book.places.count),
    levels: levelsOf(head, measured, rows, profile),
    harmless: book.harmless(),
    fault_totals: Object.fromEntries(totals()),
    log: outcome.log,
    target_contests: [...outcome.targetContests],
    blind_pairs: [...outcome.blindPairs],
  };
  const told = (transaction: number) => book.places.told(transaction);
  return { ...summary, lede: ledeOf(summary, { told, timebase: head.timebase, roster }) };
}

function captureOf(head: CaptureHead, tail: CaptureTail, book: RuleBook): Summary["capture"] {
  const { timebase, channels } = head;
  const named = (id: string | null) => (id === null ? null : nameOf(channels, id));
  return {
    format: head.format,
    levels: head.levels,
    start_s: seconds(head.startTick, timebase),
    duration_s: seconds(tail.endTick - head.startTick, timebase),
    samples: tail.samples,
    edges: { scl: tail.sclEdges, sda: tail.sdaEdges },
    sample_interval_s: head.sampleTicks === null || !judgeable(timebase) ? null : seconds(head.sampleTicks, timebase),
    channels: channels.map((channel) => nameOf(channels, channel.id)),
    scl: nameOf(channels, head.proposal.scl),
    sda: nameOf(channels, head.proposal.sda),
    taps: head.taps.map((tap) => ({ label: tap.label, scl: named(tap.scl), sda: named(tap.sda) })),
    vdd_v: head.vdd_v,
    vil_v: head.vil_v,
    vih_v: head.vih_v,
    time_base: timebase.origin,
    warnings: [...head.warnings, ...tail.warnings, ...book.warnings()],
  };
}

/** A CSV column by its header cell where that is unique, else by its number; a VCD channel by its path. */
function nameOf(channels: readonly Channel[], id: string): string {
  const channel = channels.find((candidate) => candidate.id === id);
  if (channel === undefined || !id.startsWith("@") || channel.name === "") return id;
  return channels.filter((candidate) => candidate.name === channel.name).length === 1 ? channel.name : id;
}
