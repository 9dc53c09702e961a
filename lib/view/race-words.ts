// In: a bit race, a contest, a what-if. Out: the sentences beside them: what all of them send, what was wanted, how a typed
// message fares, why a contest is not certain and what would settle it.

import type { Contest, Summary } from "../diagnosis/report";
import { type Meeting, type MessagePart, placeOf, type Slot, UNDEFINED_PAIRS } from "../forensics/intent";
import { address, count, duration, hex } from "./format";
import { byName, type Leaver, type Race } from "./race";

const NUMBERS =
  "no one two three four five six seven eight nine ten eleven twelve thirteen fourteen fifteen sixteen seventeen eighteen nineteen twenty".split(
    " ",
  );

/** "two bits", "one bit", "214 bits". */
export function numbered(value: number, noun: string): string {
  return `${NUMBERS[value] ?? count(value)} ${noun}${value === 1 ? "" : "s"}`;
}

/** Bytes spelled out one by one before the rest is only counted. */
const SPELLED = 5;

/** What the first `slots` slots of a message say, piece by piece. */
export function prefixWords(parts: readonly MessagePart[], slots: number): string[] {
  const words: string[] = [];
  let left = slots;
  let spelled = 0;
  let counted = 0;
  for (const part of parts) {
    const read = ((part.bytes[0]?.value ?? 0) & 1) === 1;
    for (const [k, byte] of part.bytes.entries()) {
      if (left <= 0) break;
      const bits = Math.min(left, byte.bits);
      left -= bits;
      const ninth = byte.bits === 8 && byte.ack !== null && left > 0;
      if (ninth) left--;
      if (bits === byte.bits && byte.bits === 8 && k > 0 && spelled >= SPELLED && left > 0) counted++;
      else
        words.push(...byteWords(byte.value, bits, k, read), ...(ninth ? [byte.ack ? "acknowledged" : "not acknowledged"] : []));
      spelled++;
    }
    if (counted > 0) words.push(numbered(counted, "more byte"));
    counted = 0;
    if (left > 0 && part.closes !== "none") {
      left--;
      words.push(part.closes === "Sr" ? "repeated START" : "STOP");
    }
  }
  return words;
}

function byteWords(value: number, bits: number, place: number, read: boolean): string[] {
  if (place === 0) {
    const ten = value >> 3 === 0b11110;
    if (bits < 7) return [numbered(bits, "address bit")];
    const named = ten ? `the 10-bit prefix ${hex(value)}` : `address ${address(value >> 1, 7)}`;
    return bits === 7 ? [named] : [named, read ? "read" : "write"];
  }
  if (bits === 8) return [read ? `${hex(value)} read` : `byte ${hex(value)}`];
  return [numbered(bits, read ? "bit of a byte read" : "data bit").replace("bit of a byte reads", "bits of a byte read")];
}

function slotWords(slot: Slot): string {
  if (slot === "P") return "a STOP";
  if (slot === "Sr") return "a repeated START";
  return slot === null || slot === "T" ? "an unknown bit" : `a ${slot}`;
}

/** Two sentences: what they all send, and where they part. */
export function raceSentences(race: Race): string {
  const who = race.leavers.length === 1 ? "Both controllers send" : `All ${NUMBERS[race.leavers.length + 1]} controllers send`;
  return race.leavers
    .map((leaver, k) => {
      const { at, intent } = leaver.yielding;
      const parting = `${slotWords(race.bus[at] ?? null)} against ${slotWords(intent[at] ?? null)}`;
      if (k > 0) return `${capital(leaver.name)} goes on to bit ${leaver.contest.bit_index}: ${parting}.`;
      if (at === 0) return `The very first bit differs: ${parting}.`;
      const words = prefixWords(race.parts, at);
      return `${who} the same ${numbered(at, "bit")}: ${words.join(", ")}. The first bit that differs is ${parting}.`;
    })
    .join(" ");
}

function capital(text: string): string {
  return `${text.charAt(0).toUpperCase()}${text.slice(1)}`;
}

/** What stands on the dotted line of the one that let go. */
export function releasedWords({ yielding }: Leaver, race: Race): string {
  if (!yielding.fromRetry) return "released; what it wanted after that is not known";
  const start = race.starts.findLast((entry) => entry <= yielding.at) ?? 0;
  const end = start + Math.floor((yielding.at - start) / 9) * 9 + 8;
  const rest = yielding.intent.slice(yielding.at + 1, end).filter((slot) => slot === 0 || slot === 1);
  return rest.length === 0 ? "released; its retry shows the rest" : `released; wanted ${rest.join(" ")}, as its retry shows`;
}

/** "bit 20", counted from the START or repeated START before it. */
export function bitWords(slots: readonly Slot[], at: number): string {
  const { part, pulse } = placeOf(slots, at);
  return part === 0 ? `bit ${count(pulse)}` : `bit ${count(pulse)} after repeated START ${part}`;
}

/** How a typed message fares against the one on the bus. */
export function whatIfWords(meeting: Meeting, intent: readonly Slot[]): string {
  const where = bitWords(intent, meeting.at);
  switch (meeting.outcome) {
    case "keeps":
      return `it would have kept the bus from ${where}: it sends 0 where the bus had 1`;
    case "yields":
      return `it contradicts the bus at ${where}: it sends 1, the bus stays 0, and it yields`;
    case "tie":
      return "it ties: the same to the end, and neither would have noticed the other";
    case "open":
      return `not decided by what is known: equal up to ${where}`;
    case "undefined":
      return `at ${where} it is ${UNDEFINED_PAIRS[meeting.pair]}: UM10204 3.1.8 gives no outcome for that pair`;
  }
}

/** One measurement that would settle a contest, and what it would add where that can be reckoned. */
export interface Settling {
  readonly text: string;
  readonly bits: number | null;
}

/** Log-odds that a drive tap carries in the report: nothing else comes near. */
const TAP_BITS = 20;

/**
 * Most that SCL lows could say for clock synchronisation: `lows` intervals whose means differ by `difference`, blurred by
 * nothing but sampling (variance step²/6 of an interval between two rounded instants). Half the squared distance, in bits.
 */
export function clockBits(difference: number, step: number, lows: number): number {
  return (lows * (difference * difference * 6)) / (step * step) / 2 / Math.LN2;
}

function clockSettling(contest: Contest, summary: Summary): Settling | null {
  const rows = [contest.kept, contest.yielded].map((id) => summary.controllers.find((row) => row.id === id));
  const [a, b] = rows.map((row) => row?.tlow_s ?? null);
  const step = summary.capture.sample_interval_s;
  if (a === null || b === null || step === null || a === undefined || b === undefined) return null;
  const difference = Math.abs(a - b);
  if (difference === 0) return null;
  const wanted = difference / 4;
  if (wanted >= step) return null;
  const now = clockBits(difference, step, contest.bit_index + 1);
  const then = clockBits(difference, wanted, contest.bit_index + 1);
  const gain = Math.min(TAP_BITS, then) - Math.min(TAP_BITS, now);
  // What the clock could say already, faster sampling does not add.
  if (gain < 0.5) return null;
  return {
    text: `Sample at least every ${duration(wanted)}: the SCL lows of the two differ by ${duration(difference)}, and a sample here is ${duration(step)}. If nothing but sampling blurs them, the clock would then say more.`,
    bits: gain,
  };
}

/** Why a contest is not certain, each with what would settle it; none for one that is. */
export function settlings(contest: Contest, summary: Summary): Settling[] {
  if (contest.grade === "certain") return [];
  const has = (kind: Contest["evidence"][number]["kind"]) => contest.evidence.some((entry) => entry.kind === kind);
  const who = controllerName(contest, summary);
  const list: Settling[] = [
    {
      text: `Record what ${who} itself drives as a tap, before its series resistor: letting go of SDA while the bus is low is proof.`,
      bits: TAP_BITS,
    },
  ];
  const clock = clockSettling(contest, summary);
  if (clock) list.push(clock);
  if (summary.capture.levels === "digital") {
    list.push({
      text: `Record in volts, with a series resistor of 100 to 200 Ω in the SDA of ${who}: each driver then has its own low level, and the step shows who let go. How much that adds depends on the noise.`,
      bits: null,
    });
  }
  if (contest.retry === null)
    list.push({
      text: `Record longer: no retry of ${who} stands in this record, and one that fits is strong evidence.`,
      bits: null,
    });
  if (!has("log"))
    list.push({ text: `Attach the log of ${who}: an entry of lost arbitration at this time speaks for a contest.`, bits: null });
  return list;
}

function controllerName(contest: Contest, summary: Summary): string {
  const row = summary.controllers.find((controller) => controller.id === contest.yielded);
  return row ? (row.name ?? `controller ${row.id}`) : "each controller";
}

/** Which contests these lines could not show, in sentences; none where every one would leave its mark. */
export function blindSentences({ blind_pairs, controllers }: Pick<Summary, "blind_pairs" | "controllers">): string[] {
  const name = (id: string) => byName({ controllers }, id);
  return (blind_pairs ?? []).map(
    ({ kept, yielded }) =>
      `Had ${name(yielded)} yielded to ${name(kept)}, nothing on these lines could show it: the two together look like ${name(kept)} alone. Only a retry that fits, a log or a tap of ${name(yielded)} speaks for such a contest.`,
  );
}
