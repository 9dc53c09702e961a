// In: a VCD as a ByteSource. Out: an opened capture: the head settled from the header and the first part of the changes,
// the body read once per `read`. IEEE 1364-2005 clause 18. Nothing holds the file.

import { ok, type Problem, type Result, refuse, type Warning } from "../../base/result";
import type { Timebase } from "../../base/time";
import { firstBytes, guardInflate } from "../bytes/gzip";
import type { ByteSource } from "../bytes/source";
import { plainChunks, type TextForm, textForm } from "../bytes/text";
import { needsMore, type Proposal, proposeChannels } from "../channels/propose";
import type { CaptureHead, CaptureTail, EdgeSink, OpenCapture, Opened, ReadChoices, TapChoice } from "./reader";
import { BusFollower, type BusLines, type TapLines } from "./vcd-bus";
import { findOffer, type Offer, type Offers, offersOf, withChosen } from "./vcd-channels";
import { CodeTable } from "./vcd-codes";
import { HeaderReader } from "./vcd-header";
import { ChangeScanner } from "./vcd-scan";
import { Survey } from "./vcd-survey";
import type { Limits } from "./vcd-volts";

/** Bytes of changes after which the channel finder is asked; then four times as many, and so on while it needs more. */
const SURVEY = 256 * 1024;
/** Edges of the first part of the body leave at once, however large the chunks are. */
const FIRST_PART = 64 * 1024;
const TEN = (power: number) => Number(`1e${power}`);

interface Surveyed {
  readonly header: HeaderReader;
  readonly bodyAt: number;
  readonly offers: Offers;
  readonly survey: Survey;
  readonly proposal: Proposal;
  readonly scanner: ChangeScanner;
}

/** `gzip`: the source inflates a compressed file; only noted in the head. */
export async function openVcd(source: ByteSource, choices: ReadChoices, gzip: boolean): Promise<Opened> {
  return guardInflate(async () => {
    const start = await firstBytes(source, 4096);
    if (!start.ok) return start;
    const form = textForm(start.value);
    const surveyed = await survey(source, form, choices);
    if (!surveyed.ok) return refuse(await placed(source, form, surveyed.problem));
    const lines = linesOf(surveyed.value, choices);
    if (!lines.ok) return lines;
    const head = headOf(surveyed.value, lines.value, choices, gzip);
    return ok({
      head,
      read: (sink: EdgeSink) => guardInflate(() => read(source, form, surveyed.value, lines.value, sink)),
    } satisfies OpenCapture);
  });
}

async function survey(source: ByteSource, form: TextForm, choices: ReadChoices): Promise<Result<Surveyed>> {
  const header = new HeaderReader();
  let found: { offers: Offers; survey: Survey; scanner: ChangeScanner; bodyAt: number } | null = null;
  let due = SURVEY;
  let at = 0;
  for await (const chunk of plainChunks(source.open(), form)) {
    let rest = chunk;
    if (!header.done) {
      const used = header.push(chunk);
      if (header.problem) return refuse(header.problem);
      if (!header.done) {
        at += chunk.length;
        continue;
      }
      rest = chunk.subarray(used);
      at += used;
    }
    if (found === null) {
      const offers = allOffers(header, choices);
      if (offers.offers.length === 0) return refuse(noVariables(source.name, at));
      const recorder = new Survey(offers.offers, offers.codes.length);
      found = {
        offers,
        survey: recorder,
        scanner: new ChangeScanner(new CodeTable(offers.codes), recorder.slots, at, true),
        bodyAt: at,
      };
    }
    for (let from = 0; from < rest.length; from += SURVEY) {
      found.scanner.push(rest.subarray(from, from + SURVEY));
      if (found.scanner.problem) return refuse(found.scanner.problem);
      if (found.scanner.at - found.bodyAt < due) continue;
      due *= 4;
      const proposal = propose(found.survey, found.offers, choices);
      if (!proposal.ok && !needsMore(proposal)) return proposal;
      if (proposal.ok && settled(proposal.value, found.survey, found.offers))
        return ok({ ...found, header, proposal: proposal.value });
    }
  }
  if (found === null) return refuse(header.finish(source.name));
  found.scanner.finish();
  if (found.scanner.problem) return refuse(found.scanner.problem);
  if (found.scanner.changes === 0) return refuse(noChanges(source.name, at));
  const proposal = propose(found.survey, found.offers, choices);
  return proposal.ok ? ok({ ...found, header, proposal: proposal.value }) : proposal;
}

function allOffers(header: HeaderReader, choices: ReadChoices): Offers {
  const wanted = [choices.scl, choices.sda, ...(choices.taps ?? []).flatMap((tap) => [tap.scl, tap.sda])];
  return wanted.reduce(withChosen, offersOf(header.variables));
}

function propose(recorder: Survey, offers: Offers, choices: ReadChoices): Result<Proposal> {
  return proposeChannels(
    recorder.traces(),
    offers.offers.map((offer) => offer.channel),
    choices,
  );
}

/** Whether the survey may end: the finder is sure, both lines have had a value, and a line in volts has shown both levels. */
function settled(proposal: Proposal, recorder: Survey, offers: Offers): boolean {
  if (proposal.provisional) return false;
  return [proposal.scl, proposal.sda].every((id) => {
    const offer = offers.offers.find((candidate) => candidate.channel.id === id);
    return offer !== undefined && !Number.isNaN(recorder.firstTick(offer)) && (!offer.real || recorder.limits(offer) !== null);
  });
}

function linesOf(surveyed: Surveyed, choices: ReadChoices): Result<BusLines> {
  const { offers, proposal, survey: recorder } = surveyed;
  const scl = findOffer(offers, proposal.scl);
  if (!scl.ok) return scl;
  const sda = findOffer(offers, proposal.sda);
  if (!sda.ok) return sda;
  const taps: TapLines[] = [];
  for (const tap of choices.taps ?? []) {
    const lines = tapOf(offers, tap);
    if (!lines.ok) return lines;
    taps.push(lines.value);
  }
  const volts = scl.value.real && sda.value.real;
  const shared = volts ? busLimits(recorder, scl.value, sda.value, choices) : null;
  if (volts && shared === null) return refuse(flatVolts(scl.value, sda.value));
  const limitsOf = (offer: Offer): Limits => {
    if (shared && (offer === scl.value || offer === sda.value)) return shared;
    return withChoices(recorder.limits(offer), choices) ?? { vdd: Number.NaN, vil: Number.NaN, vih: Number.NaN };
  };
  return ok({ scl: scl.value, sda: sda.value, taps, pullup: choices.pullup !== false, limitsOf, volts });
}

function tapOf(offers: Offers, tap: TapChoice): Result<TapLines> {
  const scl = tap.scl === null ? ok(null) : findOffer(offers, tap.scl);
  if (!scl.ok) return scl;
  const sda = tap.sda === null ? ok(null) : findOffer(offers, tap.sda);
  if (!sda.ok) return sda;
  return ok({ scl: scl.value, sda: sda.value, inverted: tap.polarity === "drive" });
}

/** Both bus lines share one supply: the higher of the two estimates, as a line that was hardly used may show too little. */
function busLimits(recorder: Survey, scl: Offer, sda: Offer, choices: ReadChoices): Limits | null {
  const found = [recorder.limits(scl), recorder.limits(sda)].filter((limits) => limits !== null);
  const best = found.length === 0 ? null : found.reduce((a, b) => (b.vdd > a.vdd ? b : a));
  return withChoices(best, choices);
}

function withChoices(found: Limits | null, { vdd_v, vil_v, vih_v }: ReadChoices): Limits | null {
  const vdd = vdd_v ?? found?.vdd ?? (vih_v === undefined ? undefined : vih_v / 0.7);
  if (vdd === undefined) return null;
  return { vdd, vil: vil_v ?? 0.3 * vdd, vih: vih_v ?? 0.7 * vdd };
}

function headOf(surveyed: Surveyed, lines: BusLines, choices: ReadChoices, gzip: boolean): CaptureHead {
  const { header, offers, proposal, survey: recorder } = surveyed;
  const warnings: Warning[] = [...proposal.warnings];
  const timebase = timebaseOf(header, choices, warnings);
  if (surveyed.scanner.undeclaredAt >= 0) {
    warnings.push({
      code: "undeclared-code",
      message: `A value change at byte ${surveyed.scanner.undeclaredAt} names a code that no $var declares; changes of undeclared codes are left out.`,
    });
  }
  const limits = lines.volts ? lines.limitsOf(lines.scl) : null;
  const first = [recorder.firstTick(lines.scl), recorder.firstTick(lines.sda)].filter((tick) => !Number.isNaN(tick));
  return {
    format: "vcd",
    levels: lines.volts ? "volts" : "digital",
    gzip,
    timebase,
    startTick: first.length === 0 ? 0 : Math.min(...first),
    sampleTicks: null,
    channels: offers.offers.map((offer) => offer.channel),
    proposal: { scl: proposal.scl, sda: proposal.sda, basis: proposal.basis, reason: proposal.reason },
    taps: (choices.taps ?? []).map((tap, index) => ({
      ...tap,
      scl: lines.taps[index].scl?.channel.id ?? null,
      sda: lines.taps[index].sda?.channel.id ?? null,
    })),
    vdd_v: limits?.vdd ?? null,
    vil_v: limits?.vil ?? null,
    vih_v: limits?.vih ?? null,
    warnings,
    metadata: header.metadata,
  };
}

function timebaseOf(header: HeaderReader, choices: ReadChoices, warnings: Warning[]): Timebase {
  if (header.step) {
    // Powers of ten as decimal words, so that 1 ps is 1e12 steps a second exactly.
    return { ticksPerSecond: TEN(-header.step.unit) / header.step.count, origin: "file" };
  }
  if (choices.interval_s !== undefined) return { ticksPerSecond: 1 / choices.interval_s, origin: "given" };
  warnings.push({
    code: "no-time-base",
    message:
      "The file has no $timescale (or a zero one): times are step numbers, and no limit in seconds is judged. Give the length of a step to change that.",
  });
  return { ticksPerSecond: 1, origin: "assumed" };
}

async function read(
  source: ByteSource,
  form: TextForm,
  surveyed: Surveyed,
  lines: BusLines,
  sink: EdgeSink,
): Promise<Result<CaptureTail>> {
  const { codes } = surveyed.offers;
  const followed = [lines.scl, lines.sda, ...lines.taps.flatMap((tap) => [tap.scl, tap.sda])];
  // Only the codes that somebody follows are looked for; the others pass by unread.
  const nets = [...new Set(followed.flatMap((offer) => (offer ? [offer.net] : [])))];
  const renumber = <T extends Offer | null>(offer: T): T => (offer ? { ...offer, net: nets.indexOf(offer.net) } : offer);
  const follower = new BusFollower(
    {
      ...lines,
      scl: renumber(lines.scl),
      sda: renumber(lines.sda),
      taps: lines.taps.map((tap) => ({ ...tap, scl: renumber(tap.scl), sda: renumber(tap.sda) })),
      limitsOf: (offer) => lines.limitsOf(followed.find((other) => other?.channel === offer.channel) ?? offer),
    },
    nets.length,
    sink,
  );
  const scanner = new ChangeScanner(new CodeTable(nets.map((net) => codes[net])), follower.slots, surveyed.bodyAt, false);
  let skip = surveyed.bodyAt;
  let delivered = 0;
  let first = FIRST_PART;
  for await (const chunk of plainChunks(source.open(), form)) {
    delivered += chunk.length;
    const from = Math.min(skip, chunk.length);
    skip -= from;
    for (let at = from; at < chunk.length && !scanner.problem; first = chunk.length) {
      const part = chunk.subarray(at, at + first);
      scanner.push(part);
      at += part.length;
      follower.flush();
    }
    if (scanner.problem) return refuse(await placed(source, form, scanner.problem));
    sink.progress(source.consumed?.() ?? delivered);
  }
  scanner.finish();
  if (scanner.problem) return refuse(await placed(source, form, scanner.problem));
  follower.finish();
  return ok(await tailOf(source, form, scanner, follower));
}

async function tailOf(source: ByteSource, form: TextForm, scanner: ChangeScanner, follower: BusFollower): Promise<CaptureTail> {
  const warnings: Warning[] = [];
  if (follower.released > 0) {
    const message = `A bus line stands at z ${follower.released} times; it was taken as high, because a bus line has a pull-up. Say so if there is none.`;
    warnings.push({ code: "z-taken-high", message, count: follower.released });
  }
  if (follower.unknown > 0) {
    const message = `A bus line is unknown (x, or driven both ways) at ${follower.unknown} instants; nothing is decoded through them.`;
    warnings.push({ code: "unknown-levels", message, count: follower.unknown });
  }
  if (scanner.offCount > 0) {
    const message = `Recording was switched off ${scanner.offCount} times ($dumpoff); the record is cut there.`;
    warnings.push({ code: "not-recorded", message, count: scanner.offCount });
  }
  if (scanner.backwardsAt >= 0) {
    const line = await lineOf(source, form, scanner.backwardsAt);
    const message = `Time goes back at line ${line} (byte ${scanner.backwardsAt}); what stands there was set aside until time goes on, and the record is cut.`;
    warnings.push({ code: "time-backwards", message, line, count: scanner.asideChanges });
  }
  if (scanner.truncated) {
    warnings.push({
      code: "truncated",
      message: `The file ends in the middle of an entry (byte ${scanner.at}); what came before was read.`,
    });
  }
  return {
    endTick: Number.isNaN(scanner.tick) ? 0 : scanner.tick,
    samples: scanner.changes,
    sclEdges: follower.bus.sclEdges,
    sdaEdges: follower.bus.sdaEdges,
    rowsSetAside: scanner.asideChanges,
    excursions: follower.excursions.list,
    excursionCount: follower.excursions.count,
    warnings,
  };
}

/** Line of a byte, counted by reading the file again; only where something went wrong. */
async function lineOf(source: ByteSource, form: TextForm, byte: number): Promise<number> {
  let line = 1;
  let left = byte;
  for await (const chunk of plainChunks(source.open(), form)) {
    const end = Math.min(left, chunk.length);
    for (let i = 0; i < end; i++) if (chunk[i] === 10) line++;
    left -= end;
    if (left === 0) break;
  }
  return line;
}

/** The problem with its line, where only its byte is known. */
async function placed(source: ByteSource, form: TextForm, problem: Problem): Promise<Problem> {
  const { byte, line } = problem.place;
  if (byte === undefined || line !== undefined || problem.code === "empty") return problem;
  const found = await lineOf(source, form, byte);
  return { ...problem, message: `${source.name}, line ${found}: ${problem.message}`, place: { byte, line: found } };
}

function noVariables(name: string, byte: number): Problem {
  return {
    code: "no-channels",
    message: `The VCD header of ${name} declares no variable.`,
    advice: "Dump the two bus lines: $dumpvars with the scope that holds them.",
    place: { byte },
  };
}

function noChanges(name: string, byte: number): Problem {
  return {
    code: "no-changes",
    message: `${name} has a VCD header but no value change after it.`,
    advice: "Let the simulation run after $dumpvars, and close the file before copying it.",
    place: { byte },
  };
}

function flatVolts(scl: Offer, sda: Offer): Problem {
  return {
    code: "no-activity",
    message: `${scl.channel.id} and ${sda.channel.id} never change their voltage, so no levels can be told apart.`,
    advice: "Give VDD, or choose other channels.",
    place: {},
  };
}
