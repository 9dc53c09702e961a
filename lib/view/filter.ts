// In: the ledger, the marks and what a person asks to see. Out: the transactions that remain, as ascending indices; null
// stands for all of them. Also the reader of the address and byte searches.

import { DIRECTIONS } from "../engine/bus/transactions";
import type { Ledger } from "./ledger";
import type { Marks } from "./marks";

export const SHOWS = ["all", "contested", "stretched", "no-answer", "outside-limits", "faulty", "tagged"] as const;
export type Show = (typeof SHOWS)[number];

export const SHOW_WORDS: Record<Show, string> = {
  all: "all",
  contested: "contested",
  stretched: "stretched",
  "no-answer": "no answer",
  "outside-limits": "outside limits",
  faulty: "faulty",
  tagged: "tagged",
};

export interface LedgerFilter {
  readonly show: Show;
  readonly address: number | null;
  readonly direction: "R" | "W" | null;
  /** Only transactions in which some byte was not acknowledged. */
  readonly nack: boolean;
  /** Byte values in order, as the person wrote them; "" for none. */
  readonly bytes: string;
}

export const EVERYTHING: LedgerFilter = { show: "all", address: null, direction: null, nack: false, bytes: "" };

/** A byte, or a gap of any one byte ("..", "??"). */
export type Pattern = readonly (number | null)[];

/**
 * Reads a byte search: two hexadecimal digits each, with or without spaces, commas or 0x; ".." or "??" stands for any byte.
 * Null where it is not one.
 */
export function bytePattern(text: string): Pattern | null {
  const bare = text
    .trim()
    .replace(/0x/gi, " ")
    .replace(/[\s,;:_-]+/g, "");
  if (bare === "" || bare.length % 2 !== 0) return null;
  const pattern: (number | null)[] = [];
  for (let k = 0; k < bare.length; k += 2) {
    const pair = bare.slice(k, k + 2);
    if (pair === ".." || pair === "??") pattern.push(null);
    else if (/^[0-9a-f]{2}$/i.test(pair)) pattern.push(Number.parseInt(pair, 16));
    else return null;
  }
  return pattern.some((entry) => entry !== null) ? pattern : null;
}

/**
 * Reads an address in either form: up to 0x7F the 7-bit address itself, from 0x80 to 0xFF the byte as sent (its R/W bit is
 * dropped, and gives the direction), above that a 10-bit address. Null where it is none.
 */
export function addressSearch(text: string): { readonly address: number; readonly direction: "R" | "W" | null } | null {
  const match = /^\s*(?:0x)?([0-9a-f]{1,3})h?\s*$/i.exec(text);
  if (!match) return null;
  const value = Number.parseInt(match[1], 16);
  if (value > 0x3ff) return null;
  if (value >= 0x80 && value <= 0xff && match[1].length <= 2) return { address: value >> 1, direction: value & 1 ? "R" : "W" };
  return { address: value, direction: null };
}

function listed(show: Show, marks: Marks, tagged: readonly number[]): readonly number[] | null {
  switch (show) {
    case "all":
      return null;
    case "contested":
      return marks.contested;
    case "stretched":
      return marks.stretched;
    case "no-answer":
      return marks.unanswered;
    case "outside-limits":
      return marks.outside;
    case "faulty":
      return marks.faulty;
    case "tagged":
      return tagged;
  }
}

/** Whether the bytes from `first` on, `count` of them, contain the pattern. */
function contains(ledger: Ledger, first: number, count: number, pattern: Pattern): boolean {
  for (let from = 0; from + pattern.length <= count; from++) {
    let k = 0;
    while (k < pattern.length && (pattern[k] === null || ledger.value(first + from + k) === pattern[k])) k++;
    if (k === pattern.length) return true;
  }
  return false;
}

function unacknowledged(ledger: Ledger, first: number, count: number): boolean {
  for (let k = 0; k < count; k++) if (ledger.byte(first + k).ack === false) return true;
  return false;
}

export interface FilterInput {
  readonly ledger: Ledger;
  readonly marks: Marks;
  /** Transactions with a tag, ascending. */
  readonly tagged: readonly number[];
}

/** Whether a filter leaves everything in. */
export function passesAll(filter: LedgerFilter): boolean {
  return (
    filter.show === "all" &&
    filter.address === null &&
    filter.direction === null &&
    !filter.nack &&
    bytePattern(filter.bytes) === null
  );
}

export function filtered(input: FilterInput, filter: LedgerFilter): Uint32Array | null {
  if (passesAll(filter)) return null;
  const chosen = listed(filter.show, input.marks, input.tagged);
  const pattern = bytePattern(filter.bytes);
  const { ledger } = input;
  const kept = new Uint32Array(chosen ? chosen.length : ledger.length);
  let total = 0;
  const take = (index: number, address: number, direction: number, firstByte: number, byteCount: number) => {
    if (filter.address !== null && address !== filter.address) return;
    if (filter.direction !== null && DIRECTIONS[direction] !== filter.direction) return;
    if (filter.nack && !unacknowledged(ledger, firstByte, byteCount)) return;
    if (pattern && !contains(ledger, firstByte, byteCount, pattern)) return;
    kept[total++] = index;
  };
  if (chosen) {
    for (const index of chosen) {
      if (index >= ledger.length) break;
      const row = ledger.row(index);
      take(index, row.address, DIRECTIONS.indexOf(row.direction), row.firstByte, row.byteCount);
    }
  } else {
    let first = 0;
    for (const block of ledger.blocks) {
      for (let k = 0; k < block.length; k++) {
        take(first + k, block.address[k], block.direction[k], block.firstByte[k], block.byteCount[k]);
      }
      first += block.length;
    }
  }
  return kept.slice(0, total);
}
