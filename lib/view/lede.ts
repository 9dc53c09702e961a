// In: the summary of a capture and the names on its bus. Out: two to four plain sentences saying what happened, how bad and
// where, in pieces that the page can set: running text, emphasis, addresses, and transactions one can go to.

import type { Contest, Fault, FaultKind, Summary } from "../diagnosis/report";
import { count, duration, probability } from "./format";

export interface Piece {
  readonly kind: "text" | "strong" | "mono" | "row";
  readonly text: string;
  /** Only for kind "row": the transaction it leads to. */
  readonly transaction?: number;
}

const text = (words: string): Piece => ({ kind: "text", text: words });
const strong = (words: string): Piece => ({ kind: "strong", text: words });
const mono = (words: string): Piece => ({ kind: "mono", text: words });
const row = (transaction: number): Piece => ({ kind: "row", text: count(transaction), transaction });

const NUMBERS = ["no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve"];

/** Small numbers as words, larger ones as digits. */
function many(value: number): string {
  return NUMBERS[value] ?? count(value);
}

function plural(value: number, one: string, more = `${one}s`): string {
  return `${many(value)} ${value === 1 ? one : more}`;
}

function capital(words: string): string {
  return words.charAt(0).toUpperCase() + words.slice(1);
}

function nameOf(summary: Summary, id: string | null, otherwise: string): string {
  const known = summary.controllers.find((controller) => controller.id === id);
  return known?.name ?? (id === null ? otherwise : `controller ${id}`);
}

function oneContest(summary: Summary, contest: Contest): Piece[] {
  const yielded = nameOf(summary, contest.yielded, "the other controller");
  const kept = contest.kept === null ? "" : ` ${capital(nameOf(summary, contest.kept, ""))} kept the bus.`;
  const sure = contest.grade === "certain" ? "" : ` (${contest.grade}, ${probability(contest.probability)})`;
  const pieces = [
    text("Transaction "),
    row(contest.transaction),
    text(` was contested${sure}: at bit ${contest.bit_index} ${yielded} sent a high, the bus stayed low, and it left.${kept}`),
  ];
  if (contest.retry !== null) pieces.push(text(" Its retry is "), row(contest.retry), text("."));
  return pieces;
}

function contestSentences(summary: Summary): Piece[] {
  const { contests } = summary;
  if (contests.length === 0) return [];
  const strongest = contests.reduce((best, contest) => (contest.probability > best.probability ? contest : best));
  const first =
    contests.length === 1
      ? []
      : [strong(`${capital(many(contests.length))} transactions were contested.`), text(" The surest: ")];
  const lost = contests.filter((contest) => contest.retry === null).length;
  const after =
    contests.length === 1
      ? []
      : [text(lost === 0 ? " Every one was sent again." : ` ${capital(plural(lost, "contest"))} had no retry in this record.`)];
  return [...first, ...oneContest(summary, strongest), ...after, text(" ")];
}

const FAULT_SENTENCES: Record<FaultKind, readonly [string, string]> = {
  "address-nack": ["address was not answered", "addresses were not answered"],
  "data-nack": ["data byte was refused", "data bytes were refused"],
  "missing-stop": ["transaction has no STOP", "transactions have no STOP"],
  "misplaced-start": ["START stands inside a byte", "STARTs stand inside a byte"],
  "misplaced-stop": ["STOP stands inside a byte", "STOPs stand inside a byte"],
  "short-byte": ["byte broke off", "bytes broke off"],
  "void-message": ["START was followed at once by STOP", "STARTs were followed at once by STOP"],
  spike: ["spike was shorter than a receiver acts on", "spikes were shorter than a receiver acts on"],
  "sda-change-while-high": ["time SDA moved while SCL was high", "times SDA moved while SCL was high"],
  "scl-stuck-low": ["time SCL was held low", "times SCL was held low"],
  "sda-stuck-low": ["time SDA was held low", "times SDA was held low"],
  "bus-clear": ["bus clear was tried", "bus clears were tried"],
  "phantom-start": ["START was followed by no clock", "STARTs were followed by no clock"],
  "reserved-address": ["reserved address was used", "reserved addresses were used"],
  "pec-mismatch": ["packet error code does not match", "packet error codes do not match"],
  "smbus-timeout": ["SMBus timeout passed", "SMBus timeouts passed"],
  "low-swing": ["line level is too close to a threshold", "line levels are too close to a threshold"],
  "slow-rise": ["rise is too slow", "rises are too slow"],
  "between-thresholds": ["visit ended between the thresholds", "visits ended between the thresholds"],
  "address-collision": ["address is answered by two targets", "addresses are answered by two targets"],
  "bit-slip": ["target lost count of the clock", "targets lost count of the clock"],
  "look-alike": ["event only looks like lost arbitration", "events only look like lost arbitration"],
};

/** The commonest kinds are spelled out, the rest are counted. */
const SPELLED = 3;

function faultSentence(faults: readonly Fault[]): Piece[] {
  const kinds = new Map<FaultKind, Fault[]>();
  for (const fault of faults) kinds.set(fault.kind, [...(kinds.get(fault.kind) ?? []), fault]);
  const sorted = [...kinds].sort((a, b) => b[1].length - a[1].length);
  const pieces: Piece[] = [];
  sorted.slice(0, SPELLED).forEach(([kind, list], place) => {
    const words = `${many(list.length)} ${FAULT_SENTENCES[kind][list.length === 1 ? 0 : 1]}`;
    const last = place > 0 && place === Math.min(SPELLED, sorted.length) - 1 && sorted.length <= SPELLED;
    pieces.push(text(place === 0 ? capital(words) : `${last ? " and " : ", "}${words}`));
    const first = list.find((fault) => fault.transaction !== null)?.transaction;
    if (first !== undefined && first !== null) pieces.push(text(list.length === 1 ? " (" : " (first "), row(first), text(")"));
  });
  if (pieces.length === 0) return [];
  const rest = sorted.slice(SPELLED).reduce((total, [, list]) => total + list.length, 0);
  pieces.push(text(rest > 0 ? `, and ${plural(rest, "fault")} of other kinds. ` : ". "));
  return pieces;
}

function limitSentence(summary: Summary): Piece[] {
  if (summary.capture.time_base === "assumed") {
    return [
      text("The file gives no sample interval, so times are sample numbers and "),
      strong("no limit was judged"),
      text("."),
    ];
  }
  const broken = summary.measurements.filter((entry) => entry.below + entry.above > 0);
  const close = summary.measurements.reduce((total, entry) => total + entry.uncertain, 0);
  const tail = close > 0 ? ` ${capital(plural(close, "measurement"))} ${close === 1 ? "is" : "are"} too close to call.` : "";
  if (broken.length === 0) {
    return summary.measurements.length === 0
      ? []
      : [text(`Every measured interval is within the ${summary.limits.profile} limits.${tail}`)];
  }
  const pieces: Piece[] = [text("Outside the "), text(`${summary.limits.profile} limits: `)];
  broken.slice(0, SPELLED).forEach((entry, place) => {
    if (place > 0) pieces.push(text(place === Math.min(SPELLED, broken.length) - 1 && broken.length <= SPELLED ? " and " : ", "));
    const below = entry.below >= entry.above;
    const worst = below ? entry.min_s : entry.max_s;
    pieces.push(strong(entry.parameter), text(` ${plural(entry.below + entry.above, "time")}`));
    if (worst !== null) pieces.push(text(", at worst "), mono(duration(worst)));
  });
  if (broken.length > SPELLED) pieces.push(text(`, and ${plural(broken.length - SPELLED, "further parameter")}`));
  pieces.push(text(`.${tail}`));
  return pieces;
}

/** The opening of a case. Never empty. */
export function lede(summary: Summary): Piece[] {
  if (summary.transactionCount === 0) {
    return [
      text("The two lines were read, but "),
      strong("no transaction stands in this record"),
      text(". Are the channels the right way round?"),
    ];
  }
  const pieces = [...contestSentences(summary), ...faultSentence(summary.faults), ...limitSentence(summary)];
  if (summary.contests.length === 0 && summary.faults.length === 0 && summary.violations.length === 0) {
    return [strong("Nothing was found wrong in what was captured. "), ...pieces];
  }
  return pieces;
}

/** The same as one string, for titles, mails and tests. */
export function ledeText(pieces: readonly Piece[]): string {
  return pieces
    .map((piece) => piece.text)
    .join("")
    .trim();
}
