// In: messages as their bytes stood on the bus, or as somebody means to send them. Out: what each controller intends slot by
// slot, what is known of it and what not; who of two keeps the bus, at which slot, or that no rule says. UM10204 Rev 7 3.1.8.

/**
 * What one controller does with SDA in one slot: 0 and 1 are driven by it; "T" is left to whoever receives or answers; a
 * repeated START and a STOP take a slot of their own after the last pulse. null where nobody knows.
 */
export type Slot = 0 | 1 | "T" | "Sr" | "P" | null;

/** What stands on the bus in one slot. */
export type BusSlot = Exclude<Slot, "T">;

/** A byte of a message. `value` is right-aligned in `bits`; `ack` null where the ninth bit is missing or not known. */
export interface MessageByte {
  readonly value: number;
  readonly bits: number;
  readonly ack: boolean | null;
}

/** From a START or repeated START to the next condition. */
export interface MessagePart {
  readonly bytes: readonly MessageByte[];
  readonly closes: "P" | "Sr" | "none";
}

/** The bit on the bus, most significant first. */
function bitOf({ value, bits }: MessageByte, place: number): 0 | 1 {
  return ((value >> (bits - 1 - place)) & 1) === 1 ? 1 : 0;
}

/** A read hands SDA over after its first byte: data come from the target, their ninth bits from the controller (3.1.6, 3.1.10). */
function isRead(part: MessagePart): boolean {
  const [first] = part.bytes;
  return first !== undefined && first.bits === 8 && (first.value & 1) === 1;
}

function closing(part: MessagePart): "P" | "Sr" | null {
  return part.closes === "none" ? null : part.closes;
}

/** Slots of a message as they stood on the bus. */
export function busOf(parts: readonly MessagePart[]): BusSlot[] {
  return parts.flatMap((part) => [
    ...part.bytes.flatMap((byte): BusSlot[] => {
      const bits = Array.from({ length: byte.bits }, (_, place) => bitOf(byte, place));
      return byte.bits < 8 || byte.ack === null ? bits : [...bits, byte.ack ? 0 : 1];
    }),
    closing(part),
  ]);
}

/** Slots of the same message as its controller means them: the bus where it drives, "T" where it does not. */
export function intentOf(parts: readonly MessagePart[]): Slot[] {
  return parts.flatMap((part) => {
    const read = isRead(part);
    return [
      ...part.bytes.flatMap((byte, k): Slot[] => {
        const own = !read || k === 0;
        const bits = Array.from({ length: byte.bits }, (_, place): Slot => (own ? bitOf(byte, place) : "T"));
        if (byte.bits < 8) return bits;
        if (own) return [...bits, "T"];
        return [...bits, byte.ack === null ? null : byte.ack ? 0 : 1];
      }),
      closing(part),
    ];
  });
}

/** Slot of each part's first pulse. */
export function startsOf(parts: readonly MessagePart[]): number[] {
  let at = 0;
  return parts.map((part) => {
    const start = at;
    at += busOf([part]).length;
    return start;
  });
}

/** Where a slot stands: part of the message, byte within it, bit 0 to 8, and pulses since the part's START. */
export interface Place {
  readonly part: number;
  readonly byte: number;
  readonly bit: number;
  readonly pulse: number;
}

export function placeOf(slots: readonly Slot[], at: number): Place {
  let part = 0;
  let pulse = 0;
  for (let s = 0; s < at; s++) {
    if (slots[s] === "Sr") {
      part++;
      pulse = 0;
    } else pulse++;
  }
  return { part, byte: Math.floor(pulse / 9), bit: pulse % 9, pulse };
}

/** The three pairs for which 3.1.8 gives no outcome while arbitration goes on. */
export const UNDEFINED_PAIRS = {
  "sr-data": "a repeated START against a data bit",
  "stop-data": "a STOP against a data bit",
  "sr-stop": "a repeated START against a STOP",
} as const;
export type UndefinedPair = keyof typeof UNDEFINED_PAIRS;

/**
 * How one message fares against another that starts with it, and the slot that settles it. keeps: it sends 0 where the other
 * sends 1. yields: the reverse. tie: equal to the end, nobody notices. open: beyond what is known of one of them.
 */
export type Meeting =
  | { readonly outcome: "keeps" | "yields" | "tie" | "open"; readonly at: number }
  | { readonly outcome: "undefined"; readonly at: number; readonly pair: UndefinedPair };

function undefinedPair(a: Slot, b: Slot): UndefinedPair | null {
  if (a === "Sr" || b === "Sr") return a === "P" || b === "P" ? "sr-stop" : "sr-data";
  return a === "P" || b === "P" ? "stop-data" : null;
}

export function meet(mine: readonly Slot[], other: readonly Slot[]): Meeting {
  for (let at = 0; ; at++) {
    const a = mine[at] ?? null;
    const b = other[at] ?? null;
    if (a === null || b === null) return { outcome: "open", at };
    if (a === b) {
      if (a === "P") return { outcome: "tie", at };
      continue;
    }
    const pair = undefinedPair(a, b);
    if (pair !== null) return { outcome: "undefined", at, pair };
    // One driving where the other leaves SDA to a target: they no longer count the same bytes.
    if (a === "T" || b === "T") return { outcome: "open", at };
    return { outcome: a === 0 ? "keeps" : "yields", at };
  }
}

/**
 * The wired AND of drivers in one slot: low if any of them, or the target where SDA is left to it, pulls low (3.1.8). Conditions
 * that all agree on stand; null where it takes something nobody knows.
 */
export function wiredAnd(drivers: readonly Slot[], target: BusSlot = null): BusSlot {
  const levels = drivers.map((slot) => (slot === "T" ? target : slot));
  if (levels.length === 0) return null;
  const [first] = levels;
  if (levels.every((level) => level === first)) return first;
  if (levels.includes(0)) return levels.some((level) => level === "P" || level === "Sr") ? null : 0;
  return null;
}

/** One controller that yielded: at which slot, and what it wanted, as far as anybody knows. */
export interface Yielding {
  readonly at: number;
  readonly intent: readonly Slot[];
  /** Whether `intent` after `at` comes from a retry that fits; else it is unknown from there on. */
  readonly fromRetry: boolean;
}

/** What the controller that yielded at slot `at` wanted: the same up to there, a 1 there, and then what its retry shows. */
export function yielding(kept: readonly Slot[], at: number, retry: readonly MessagePart[] | null): Yielding {
  const same = kept.slice(0, at);
  const wanted = retry === null ? null : intentOf(retry);
  const fits =
    wanted !== null && same.every((slot, s) => slot === wanted[s]) && wanted[at] !== undefined && wanted[at] !== kept[at];
  if (wanted !== null && fits && wanted[at] !== 0) return { at, intent: wanted, fromRetry: true };
  const unknown = Array.from({ length: Math.max(0, kept.length - at - 1) }, (): Slot => null);
  return { at, intent: [...same, 1, ...unknown], fromRetry: false };
}

export interface WhatIf {
  readonly meeting: Meeting;
  /** The message as it would have been sent: it ends where a byte was not acknowledged. */
  readonly intent: readonly Slot[];
  /** What the bus would have shown. */
  readonly bus: readonly BusSlot[];
}

/**
 * What would have come of `typed`, sent against the message that kept the bus.
 * @param kept its intent, @param bus what stood there
 */
export function whatIf(kept: readonly Slot[], bus: readonly BusSlot[], typed: readonly Slot[]): WhatIf {
  const intent = endedByNack(typed, kept, bus);
  const meeting = meet(intent, kept);
  const { outcome, at } = meeting;
  if (outcome === "yields" || outcome === "tie") return { meeting, intent, bus };
  const shared = bus.slice(0, at);
  if (outcome === "keeps") {
    // Whether targets would have answered the same from there on is not known.
    return { meeting, intent, bus: [...shared, ...intent.slice(at).map((slot): BusSlot => (slot === "T" ? null : slot))] };
  }
  return { meeting, intent, bus: [...shared, null] };
}

/** Everybody sees the same missing acknowledge; who said the same up to there ends as the one on the bus did. */
function endedByNack(typed: readonly Slot[], kept: readonly Slot[], bus: readonly BusSlot[]): readonly Slot[] {
  let pulse = 0;
  for (let s = 0; s < typed.length && typed[s] === kept[s]; s++) {
    if (typed[s] === "Sr") {
      pulse = 0;
      continue;
    }
    const refused = typed[s] === "T" && pulse % 9 === 8 && bus[s] === 1;
    if (refused && (kept[s + 1] === "P" || kept[s + 1] === "Sr")) return kept.slice(0, s + 2);
    pulse++;
  }
  return typed;
}

/** A message with the name of whoever sends it. */
export interface Contender {
  readonly name: string;
  readonly intent: readonly Slot[];
}

/** Every message against every later one of the list. */
export function pairings(list: readonly Contender[]): { readonly a: number; readonly b: number; readonly meeting: Meeting }[] {
  return list.flatMap((mine, a) =>
    list.slice(a + 1).map((other, k) => ({ a, b: a + 1 + k, meeting: meet(mine.intent, other.intent) })),
  );
}
