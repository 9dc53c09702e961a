// In: every usable channel's behaviour over the first part of a capture, and what the person chose. Out: which channel is
// SCL and which is SDA, why, and what that ordering and its swap decode to; or a refusal that says what was found instead.

import { ok, type Result, refuse, type Warning } from "../../base/result";
import type { Channel, ChannelProposal, ReadChoices } from "../samples/reader";
import { identical, steady } from "./behaviour";
import { copiesOf, otherBuses, tapsOf } from "./beside";
import { LINES_TRIED, type Line, label, type Pair } from "./line";
import { clueOf, findChannel } from "./names";
import { beginning, compelling, convincing, countPair, type PairCount, previewOf, worth } from "./pair";
import { foundInstead, noChannels, oneChannel } from "./refusals";
import type { LineTrace, PairPreview } from "./trace";

export interface Proposal extends ChannelProposal {
  readonly preview: PairPreview | null;
  readonly swapped: PairPreview | null;
  readonly warnings: readonly Warning[];
  /** The survey holds too little to be sure: survey further if there is more. */
  readonly provisional: boolean;
}

/** Refusals that more of the file may lift. */
const OPEN_REFUSALS = new Set(["no-activity", "no-clock", "not-a-bus"]);

/** Whether a longer survey may change the answer. */
export function needsMore(result: Result<Proposal>): boolean {
  return result.ok ? result.value.provisional : OPEN_REFUSALS.has(result.problem.code);
}

/** Whole bytes from which a proposal is settled. */
const SETTLED_BYTES = 4;

export function proposeChannels(
  traces: readonly LineTrace[],
  channels: readonly Channel[],
  choices: Pick<ReadChoices, "scl" | "sda">,
): Result<Proposal> {
  const lines = traces.map((trace) => ({ trace, clue: clueOf(trace) }));
  const scl = chosen(lines, channels, choices.scl);
  if (!scl.ok) return scl;
  const sda = chosen(lines, channels, choices.sda);
  if (!sda.ok) return sda;
  if (scl.value && sda.value) return given(scl.value, sda.value);
  if (lines.length === 0) return refuse(noChannels(channels));
  if (lines.length === 1) return refuse(oneChannel(lines[0]));
  return find(lines, scl.value, sda.value);
}

function chosen(lines: readonly Line[], channels: readonly Channel[], wanted: string | undefined): Result<Line | null> {
  if (wanted === undefined) return ok(null);
  const traceOf = (channel: Channel) => lines.find((line) => line.trace.id === channel.id);
  const found = findChannel(channels, wanted, (a, b) => {
    const one = traceOf(a);
    const other = traceOf(b);
    return one !== undefined && other !== undefined && one.trace.ticks === other.trace.ticks;
  });
  if (!found.ok) return found;
  const line = traceOf(found.value);
  if (line) return ok(line);
  return refuse({
    code: "unusable-channel",
    message: `Channel ${found.value.id} cannot be a bus line: it does not carry levels or volts.`,
    advice: "Choose a channel of 0/1 or volts; of a vector choose one bit, as name[0].",
    place: {},
  });
}

function given(scl: Line, sda: Line): Result<Proposal> {
  if (scl.trace.id === sda.trace.id) {
    return refuse({
      code: "same-channel",
      message: `SCL and SDA are both given as ${scl.trace.id}.`,
      advice: "Give two different channels.",
      place: {},
    });
  }
  const count = countPair(scl.trace, sda.trace);
  const swap = countPair(sda.trace, scl.trace);
  const warnings: Warning[] = [];
  if (clearlyBetter(swap, count)) {
    warnings.push({
      code: "channels-swapped",
      message:
        `As given, SCL = ${scl.trace.id} and SDA = ${sda.trace.id} decode to ${wording(count)}; ` +
        `the other way round they decode to ${wording(swap)}. The lines look swapped.`,
    });
  }
  return ok({
    scl: scl.trace.id,
    sda: sda.trace.id,
    basis: "given",
    reason: `SCL = ${scl.trace.id} and SDA = ${sda.trace.id} as given.`,
    preview: previewOf(scl.trace, sda.trace, count),
    swapped: previewOf(sda.trace, scl.trace, swap),
    warnings,
    provisional: false,
  });
}

function wording(count: PairCount): string {
  const bytes = count.wholeBytes === 1 ? "1 whole byte" : `${count.wholeBytes} whole bytes`;
  const breaks = count.breaks === 0 ? "no break" : count.breaks === 1 ? "1 break" : `${count.breaks} breaks`;
  return `${bytes} with ${breaks} inside a byte`;
}

function clearlyBetter(swap: PairCount, count: PairCount): boolean {
  return convincing(swap) && !convincing(count) && worth(swap) > worth(count) + 1;
}

/** Points for what the names say of a pair: both lines named, of one bus. */
function naming(scl: Line, sda: Line): number {
  const a = scl.clue;
  const b = sda.clue;
  if (a.line === "sda" || b.line === "scl") return 0;
  const stem = a.line === "scl" && b.line === "sda" && a.stem === b.stem ? 1 : 0;
  return (a.line === "scl" ? a.strength : 0) + (b.line === "sda" ? b.strength : 0) + stem;
}

const bothNamed = (pair: Pair) => pair.scl.clue.line === "scl" && pair.sda.clue.line === "sda";

function find(all: readonly Line[], scl: Line | null, sda: Line | null): Result<Proposal> {
  const lines = distinct(all);
  const named = namedPairs(lines, scl, sda);
  // The bus itself before a driver's or another bus's lines, as long as it reads as one.
  const plain = named.filter((pair) => pair.scl.clue.exact && pair.sda.clue.exact && readable(pair));
  const best = top(plain) ?? top(named);
  if (best && (plain.length > 0 || convincing(best.count))) return ok(settle(best, all, lines, named));
  const behaved = top(behavedPairs(lines, scl, sda).filter(believable));
  if (behaved) return ok(settle(behaved, all, lines, named));
  const weak = best ?? firstBeginning(lines, scl, sda);
  if (weak && acceptable(weak, scl !== null || sda !== null))
    return ok({ ...settle(weak, all, lines, named), provisional: true });
  return refuse(foundInstead(all));
}

/** Plainly named, and not plainly wrong: a bus with much noise is a bus. */
function readable({ scl, sda, count }: Pair): boolean {
  if (convincing(count)) return true;
  return count.wholeBytes > 0 && count.breaks <= 4 * count.wholeBytes && !convincing(countPair(sda.trace, scl.trace));
}

/** A pair that shows no whole byte, kept on the strength of its names or of its first bits: a stuck or broken bus is a bus too. */
function acceptable({ scl, sda, count, named }: Pair, partlyGiven: boolean): boolean {
  if (scl.trace.length === 0 && sda.trace.length === 0) return false;
  if (steady(scl.trace) && steady(sda.trace)) return false;
  // Plenty of clock and nothing but broken bytes: whatever the labels say, no bus.
  if (count.pulses > 50 && count.breaks > 8 && count.breaks > 4 * count.wholeBytes) return false;
  return named >= 5 || beginning(count) || partlyGiven;
}

const telling = ({ clue }: Line) => clue.strength + (clue.exact ? 1 : 0);

/** One line of each set with the same changes, the first in the file or the better named. */
function distinct(all: readonly Line[]): Line[] {
  const kept: Line[] = [];
  // Lines that could be equal, by what is cheap to compare: a dump may hold thousands.
  const alike = new Map<string, number[]>();
  for (const line of all) {
    const { length, initial, ticks } = line.trace;
    const key = `${length} ${initial} ${ticks[0]} ${ticks[length - 1]}`;
    const places = length === 0 ? [] : (alike.get(key) ?? []);
    const at = places.find((place) => identical(kept[place].trace, line.trace));
    if (at === undefined) {
      places.push(kept.push(line) - 1);
      alike.set(key, places);
    } else if (telling(line) > telling(kept[at])) kept[at] = line;
  }
  return kept;
}

function pairOf(scl: Line, sda: Line): Pair {
  return { scl, sda, count: countPair(scl.trace, sda.trace), named: naming(scl, sda) };
}

/** Pairs that the names make. What the names contradict (swapped labels) is left to behaviour. */
function namedPairs(lines: readonly Line[], scl: Line | null, sda: Line | null): Pair[] {
  const clocks = scl ? [scl] : lines.filter((line) => line.clue.line === "scl" && !line.clue.foreign);
  const datas = sda ? [sda] : lines.filter((line) => line.clue.line === "sda" && !line.clue.foreign);
  const pairs: Pair[] = [];
  for (const clock of clocks.slice(0, LINES_TRIED)) {
    for (const data of datas.slice(0, LINES_TRIED)) if (clock !== data) pairs.push(pairOf(clock, data));
  }
  return pairs;
}

function behavedPairs(lines: readonly Line[], scl: Line | null, sda: Line | null): Pair[] {
  const active = likely(lines.filter((line) => line.trace.length > 0));
  const clocks = scl ? [scl] : active.filter((line) => line.trace.length >= 18);
  const datas = sda ? [sda] : active;
  const pairs: Pair[] = [];
  for (const clock of clocks) for (const data of datas) if (clock.trace.id !== data.trace.id) pairs.push(pairOf(clock, data));
  return pairs;
}

/** Where there are too many lines to try: those with telling names first, those too busy to be followed last. */
function likely(lines: readonly Line[]): Line[] {
  if (lines.length <= LINES_TRIED) return [...lines];
  const rank = ({ clue, trace }: Line) => clue.strength - (trace.until === undefined ? 0 : 4) - (trace.length < 18 ? 1 : 0);
  return [...lines].sort((a, b) => rank(b) - rank(a)).slice(0, LINES_TRIED);
}

/** Behaviour without names to support it; lines whose names say SPI, UART or PWM have to show more. */
function believable(pair: Pair): boolean {
  // Labels the wrong way round are labels of a bus all the same.
  if (pair.scl.clue.line === "sda" && pair.sda.clue.line === "scl") return convincing(pair.count);
  if (!compelling(pair.count)) return false;
  if (!pair.scl.clue.foreign && !pair.sda.clue.foreign) return true;
  return pair.count.breaks === 0 && pair.count.wholeBytes >= 2 && pair.count.acked >= 1;
}

function firstBeginning(lines: readonly Line[], scl: Line | null, sda: Line | null): Pair | null {
  const active = lines.filter((line) => line.trace.length > 0 && !line.clue.foreign).slice(0, 16);
  for (const clock of scl ? [scl] : active) {
    for (const data of sda ? [sda] : active) {
      if (clock.trace.id === data.trace.id) continue;
      const pair = pairOf(clock, data);
      if (beginning(pair.count)) return pair;
    }
  }
  return null;
}

/** The best pair: by what it decodes to, names deciding between near equals; the earlier one in the file on a tie. */
function top(pairs: readonly Pair[]): Pair | null {
  let best: Pair | null = null;
  let bestWorth = 0;
  for (const pair of pairs) {
    // A well-named pair outweighs a somewhat busier one (a driver's own lines beside the bus itself).
    const value = worth(pair.count) * (1 + 0.1 * pair.named) + pair.named;
    if (best === null || value > bestWorth) {
      best = pair;
      bestWorth = value;
    }
  }
  return best;
}

function settle(pair: Pair, all: readonly Line[], lines: readonly Line[], named: readonly Pair[]): Proposal {
  const { scl, sda, count } = pair;
  const swap = countPair(sda.trace, scl.trace);
  const byNames = bothNamed(pair);
  const contradicted = scl.clue.line === "sda" || sda.clue.line === "scl";
  const copies = copiesOf(pair, all);
  const more = copies.length > 4 ? ` and ${copies.length - 4} more` : "";
  const copied = copies.length > 0 ? ` ${copies.slice(0, 4).join(", ")}${more} carry the same signal; the first was taken.` : "";
  const basis = byNames ? "names" : "behaviour";
  const told = byNames
    ? `by their names, and they decode to ${wording(count)} (swapped: ${wording(swap)})`
    : `by behaviour: one clocks the other, decoding to ${wording(count)} (swapped: ${wording(swap)})`;
  const labels = contradicted ? " The labels in the file look swapped: read as labelled they do not decode." : "";
  const reason = `SCL = ${label(scl)} and SDA = ${label(sda)} ${told}.${labels}${copied}`;
  const warnings: Warning[] = [{ code: "channels-assumed", message: `${reason} Name the channels to settle it.` }];
  if (contradicted)
    warnings.push({ code: "channels-swapped", message: `The labels of ${label(scl)} and ${label(sda)} look swapped.` });
  const taps = tapsOf(pair, lines);
  if (taps) warnings.push(taps);
  const others = otherBuses(pair, named);
  if (others) warnings.push(others);
  return {
    scl: scl.trace.id,
    sda: sda.trace.id,
    basis,
    reason,
    preview: previewOf(scl.trace, sda.trace, count),
    swapped: previewOf(sda.trace, scl.trace, swap),
    warnings,
    provisional: count.wholeBytes < SETTLED_BYTES,
  };
}
