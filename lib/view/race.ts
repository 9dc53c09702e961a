// In: the ledger and the contests of one transaction. Out: its bit race: what each contender intended slot by slot, what the bus
// showed, where each left, and the part of it that is drawn.

import type { Contest, Summary } from "../diagnosis/report";
import {
  type BusSlot,
  busOf,
  intentOf,
  type MessagePart,
  type Slot,
  startsOf,
  type Yielding,
  yielding,
} from "../forensics/intent";
import { hex } from "./format";
import type { Ledger } from "./ledger";

/** Bytes of one transaction that a race looks at; the deciding bit and what follows it stand long before. */
const MOST_BYTES = 512;
/** Earlier parts of the message are drawn along up to so many bytes; with more the race begins at the contested part. */
const PARTS_BEFORE = 24;
/** Slots drawn at most. */
export const DRAWN_SLOTS = 200;

export interface Leaver {
  readonly contest: Contest;
  readonly name: string;
  readonly yielding: Yielding;
  /** What the bus showed in its retry, slot by slot as above; null where none was found. */
  readonly retry: readonly BusSlot[] | null;
}

export interface Race {
  readonly transaction: number;
  /** Parts of the message from the first that is looked at, and their transactions. */
  readonly parts: readonly MessagePart[];
  readonly transactions: readonly number[];
  /** Slot at which each part begins. */
  readonly starts: readonly number[];
  readonly bus: readonly BusSlot[];
  readonly kept: readonly Slot[];
  readonly keptName: string;
  /** Those that yielded, in the order in which they left. */
  readonly leavers: readonly Leaver[];
}

/** Name of a controller, or its id, or that it is not known. */
export function controllerName(summary: Pick<Summary, "controllers">, id: string | null, unknown: string): string {
  if (id === null) return unknown;
  const row = summary.controllers.find((controller) => controller.id === id);
  return row?.name ?? `controller ${id}`;
}

/** A sentence of the report with its controllers by their names, where they have any: the report itself keeps to ids. */
export function byName(summary: Pick<Summary, "controllers">, sentence: string): string {
  return sentence.replace(/\bC\d+\b/g, (id) => summary.controllers.find((row) => row.id === id)?.name ?? id);
}

interface Message {
  readonly transactions: readonly number[];
  readonly parts: readonly MessagePart[];
}

/** First transaction of the message that `transaction` is a part of. */
function openingOf(ledger: Ledger, transaction: number): number {
  let first = transaction;
  while (first > 0 && ledger.row(first).opens === "Sr") first--;
  return first;
}

function partOf(ledger: Ledger, transaction: number): MessagePart {
  const row = ledger.row(transaction);
  const bytes = ledger.bytes(row, MOST_BYTES).map(({ value, bits, ack }) => ({ value, bits, ack }));
  return { bytes, closes: bytes.length < row.byteCount ? "none" : row.closes };
}

/** The message from `first` on, as far as it goes after `contested`: one part more, for a repeated START at the deciding bit. */
function messageFrom(ledger: Ledger, first: number, parts: number): Message {
  const transactions: number[] = [];
  for (let t = first; t < Math.min(ledger.length, first + parts); t++) {
    if (t > first && ledger.row(t).opens !== "Sr") break;
    transactions.push(t);
  }
  return { transactions, parts: transactions.map((t) => partOf(ledger, t)) };
}

/** The race of a contested transaction; null where its bits are not there. */
export function raceOf(ledger: Ledger, summary: Summary, transaction: number): Race | null {
  const contests = summary.contests.filter((contest) => contest.transaction === transaction);
  if (contests.length === 0 || transaction >= ledger.length) return null;
  const opening = openingOf(ledger, transaction);
  const before = Array.from({ length: transaction - opening }, (_, k) => ledger.row(opening + k).byteCount);
  const near = before.reduce((sum, bytes) => sum + bytes, 0) <= PARTS_BEFORE;
  const first = near ? opening : transaction;
  const { transactions, parts } = messageFrom(ledger, first, transaction - first + 2);
  const starts = startsOf(parts);
  const kept = intentOf(parts);
  const offset = starts[transaction - first];
  const leavers = contests.map((contest): Leaver => {
    // The report names the transaction that opens the retry; the same part of it stands as far behind.
    const again =
      contest.retry === null ? null : messageFrom(ledger, contest.retry + first - opening, transactions.length + 1).parts;
    return {
      contest,
      name: controllerName(summary, contest.yielded, "the other controller"),
      yielding: yielding(kept, offset + contest.bit_index, again),
      retry: again === null ? null : busOf(again),
    };
  });
  return {
    transaction,
    parts,
    transactions,
    starts,
    bus: busOf(parts),
    kept,
    keptName: controllerName(summary, contests[0].kept, "one controller"),
    leavers: leavers.sort((a, b) => a.yielding.at - b.yielding.at),
  };
}

/** The slots that are drawn, `to` exclusive: from START, to the end of the byte after the last deciding bit. */
export function drawnSlots(race: Race): { readonly from: number; readonly to: number } {
  const last = race.leavers.at(-1)?.yielding.at ?? 0;
  const part = race.starts.findLastIndex((start) => start <= last);
  const byteEnd = race.starts[part] + (Math.floor((last - race.starts[part]) / 9) + 1) * 9;
  const far = byteEnd + 10;
  const known = race.bus.filter((slot, s) => slot !== null || s < race.bus.length - 1).length;
  const to = Math.min(known, far);
  if (to <= DRAWN_SLOTS) return { from: 0, to };
  // Whole bytes of the contested part, so that braces stand over what they name.
  const skipped = Math.max(0, Math.ceil((to - DRAWN_SLOTS - race.starts[part]) / 9));
  return { from: race.starts[part] + skipped * 9, to };
}

export interface ByteBrace {
  readonly from: number;
  /** Exclusive. */
  readonly to: number;
  readonly text: string;
}

/** Braces over the bytes, in slots. */
export function bracesOf(race: Race): ByteBrace[] {
  return race.parts.flatMap((part, k) => {
    let at = race.starts[k];
    return part.bytes.map((byte) => {
      const from = at;
      at += byte.bits < 8 || byte.ack === null ? byte.bits : 9;
      return {
        from,
        to: from + byte.bits,
        text: byte.bits < 8 ? `${byte.value.toString(2).padStart(byte.bits, "0")}b` : hex(byte.value),
      };
    });
  });
}

/** What stands under a slot of a lane: its bit, A or N where the ninth bit is a target's, the conditions; a dot where unknown. */
export function slotText(slot: Slot, bus: BusSlot, ninth: boolean): string {
  if (slot === null) return "·";
  if (slot !== "T") return String(slot);
  if (!ninth || typeof bus !== "number") return bus === null ? "·" : String(bus);
  return bus === 0 ? "A" : "N";
}

/** Whether a slot is the ninth of its byte. */
export function isNinth(race: Pick<Race, "starts">, slot: number): boolean {
  const start = race.starts.findLast((entry) => entry <= slot) ?? 0;
  return (slot - start) % 9 === 8;
}

/** Path of one lane between two heights, and where nobody knows. A STOP rises and a repeated START falls in the middle of its slot. */
export function lanePath(
  levels: readonly BusSlot[],
  frame: { readonly left: number; readonly width: number; readonly high: number; readonly low: number },
): string {
  const { left, width, high, low } = frame;
  const parts: string[] = [];
  let pen: number | null = null;
  const to = (x: number, y: number) => {
    parts.push(pen === null ? `M${x} ${y}` : pen === y ? "" : `V${y}`);
    pen = y;
  };
  levels.forEach((level, k) => {
    const x = left + k * width;
    if (level === null) {
      pen = null;
      return;
    }
    const first = level === 1 || level === "Sr" ? high : low;
    to(x, first);
    if (level === "P" || level === "Sr") {
      parts.push(`H${x + width / 2}`);
      to(x + width / 2, level === "P" ? high : low);
    }
    parts.push(`H${x + width}`);
  });
  return parts.join("");
}

/** The level a lane draws: what it drives, the bus where it leaves SDA to a target, nothing once it has let go. */
export function laneLevels(intent: readonly Slot[], bus: readonly BusSlot[], until: number): BusSlot[] {
  return intent.map((slot, s): BusSlot => (s > until ? null : slot === "T" ? (bus[s] ?? null) : slot));
}
