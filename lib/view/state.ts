// In: what a reader sees: filter, selection, scale, place. Out: the same as the query of an address and back, so that a link
// opens at exactly this view. Unknown or damaged entries fall back to the default, one by one.

import { EVERYTHING, type LedgerFilter, SHOWS, type Show } from "./filter";

export const READINGS = ["stack", "strip", "contests", "limits", "faults"] as const;
export type Reading = (typeof READINGS)[number];

export interface ViewState {
  readonly reading: Reading;
  readonly filter: LedgerFilter;
  /** Selected transaction. */
  readonly selected: number | null;
  /** Span of the strip in ticks, null for the whole record. */
  readonly strip: { readonly from: number; readonly to: number } | null;
  /** Ticks per pixel of the stack, null for the scale that fits its usual rows. */
  readonly stackScale: number | null;
}

export const OPENING: ViewState = { reading: "stack", filter: EVERYTHING, selected: null, strip: null, stackScale: null };

function whole(text: string | null, most: number): number | null {
  if (text === null || !/^\d{1,15}$/.test(text)) return null;
  const value = Number(text);
  return value <= most ? value : null;
}

function one<T extends string>(text: string | null, of: readonly T[], otherwise: T): T {
  return of.find((entry) => entry === text) ?? otherwise;
}

function spanOf(text: string | null): ViewState["strip"] {
  const match = /^(-?\d{1,16})\.\.(-?\d{1,16})$/.exec(text ?? "");
  if (!match) return null;
  const [from, to] = [Number(match[1]), Number(match[2])];
  return from < to ? { from, to } : null;
}

/** Reads the query; `get` returns an entry or null, as URLSearchParams does. */
export function readState(get: (name: string) => string | null): ViewState {
  const direction = get("direction");
  const scale = Number(get("scale"));
  return {
    reading: one(get("reading"), READINGS, "stack"),
    filter: {
      show: one<Show>(get("show"), SHOWS, "all"),
      address: whole(get("address"), 0x3ff),
      direction: direction === "R" || direction === "W" ? direction : null,
      nack: get("nack") === "1",
      bytes: (get("bytes") ?? "").slice(0, 200),
    },
    selected: whole(get("transaction"), 2 ** 31),
    strip: spanOf(get("strip")),
    stackScale: Number.isFinite(scale) && scale > 0 ? scale : null,
  };
}

/** Entries of the query in a fixed order; what stands at its default is left out. */
export function writeState(state: ViewState): [string, string][] {
  const { filter } = state;
  const entries: [string, string | null][] = [
    ["reading", state.reading === "stack" ? null : state.reading],
    ["show", filter.show === "all" ? null : filter.show],
    ["address", filter.address === null ? null : String(filter.address)],
    ["direction", filter.direction],
    ["nack", filter.nack ? "1" : null],
    ["bytes", filter.bytes.trim() === "" ? null : filter.bytes.trim()],
    ["transaction", state.selected === null ? null : String(state.selected)],
    ["strip", state.strip ? `${Math.round(state.strip.from)}..${Math.round(state.strip.to)}` : null],
    ["scale", state.stackScale === null ? null : String(Number(state.stackScale.toPrecision(4)))],
  ];
  return entries.filter((entry): entry is [string, string] => entry[1] !== null);
}
