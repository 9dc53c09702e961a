// In: a roster's rows, and what a person types into them. Out: the one as the other: both address notations kept in step, times
// and volts with their units, and for every field that cannot be used one sentence saying why.

import type { RosterEntry } from "../forensics/contract";
import { address, addressBytes } from "./format";

/** One row as it stands in the fields of the page. */
export interface RosterDraft {
  /** Stays the same while the row is edited. */
  readonly key: string;
  readonly role: RosterEntry["role"];
  readonly name: string;
  /** 7-bit such as 0x50, or 10-bit such as 0x250. */
  readonly address: string;
  /** The byte forms, write and read: A0/A1. */
  readonly bytes: string;
  readonly registers: string;
  readonly tlow: string;
  readonly thigh: string;
  readonly vol: string;
  readonly stretch: string;
}

export type RosterField = Exclude<keyof RosterDraft, "key" | "role">;
export type RosterErrors = Partial<Record<RosterField, string>>;

/** An address above 0x7F has ten bits. */
export function addressWidth(value: number): 7 | 10 {
  return value > 0x7f ? 10 : 7;
}

function lengthText(seconds: number | null): string {
  if (seconds === null) return "";
  const [factor, unit] = seconds >= 1e-3 ? [1e3, "ms"] : seconds >= 1e-6 || seconds === 0 ? [1e6, "µs"] : [1e9, "ns"];
  return `${Number((seconds * factor).toPrecision(9))} ${unit}`;
}

export function rosterDraft(entry: RosterEntry, key: string): RosterDraft {
  const known = entry.address !== null;
  return {
    key,
    role: entry.role,
    name: entry.name,
    address: known ? address(entry.address ?? 0, addressWidth(entry.address ?? 0)) : "",
    bytes: known ? addressBytes(entry.address ?? 0, addressWidth(entry.address ?? 0)) : "",
    registers: entry.registers,
    tlow: lengthText(entry.tlow_s),
    thigh: lengthText(entry.thigh_s),
    vol: entry.vol_v === null ? "" : `${entry.vol_v} V`,
    stretch: lengthText(entry.stretch_allow_s),
  };
}

export function emptyDraft(key: string): RosterDraft {
  return {
    key,
    role: "target",
    name: "",
    address: "",
    bytes: "",
    registers: "",
    tlow: "",
    thigh: "",
    vol: "",
    stretch: "",
  };
}

/** A field changed: where it is one of the two addresses, the other follows as soon as the typed one can be read. */
export function withField(draft: RosterDraft, field: RosterField, text: string): RosterDraft {
  const next = { ...draft, [field]: text };
  if (field === "address") {
    const value = addressOf(text);
    return { ...next, bytes: typeof value === "number" ? addressBytes(value, addressWidth(value)) : "" };
  }
  if (field === "bytes") {
    const value = bytesOf(text);
    return { ...next, address: typeof value === "number" ? address(value, 7) : "" };
  }
  return next;
}

/** 7- or 10-bit address; null for none, undefined for what is no address. */
export function addressOf(text: string): number | null | undefined {
  const word = text.trim();
  if (word === "") return null;
  if (!/^(0x)?[0-9a-f]{1,3}$/i.test(word)) return undefined;
  const value = Number.parseInt(word.replace(/^0x/i, ""), 16);
  // Two digits above 7F are somebody's byte form and no 10-bit address: that one is written with three.
  if (value > 0x7f && word.replace(/^0x/i, "").length < 3) return undefined;
  return value <= 0x3ff ? value : undefined;
}

/** "A0", "A1", "A0/A1", with or without 0x, as the 7-bit address; null for none, undefined for what is no such byte. */
export function bytesOf(text: string): number | null | undefined {
  const words = text.trim().split(/\s*\/\s*/);
  if (words.length === 1 && words[0] === "") return null;
  const values = words.map((word) => (/^(0x)?[0-9a-f]{1,2}$/i.test(word) ? Number.parseInt(word.replace(/^0x/i, ""), 16) : -1));
  if (values.length > 2 || values.includes(-1)) return undefined;
  const [first] = values;
  return values.every((value) => value >> 1 === first >> 1) ? first >> 1 : undefined;
}

const SECONDS: Readonly<Record<string, number>> = { s: 1, ms: 1e-3, us: 1e-6, µs: 1e-6, μs: 1e-6, ns: 1e-9 };

/** "5.2 µs" in seconds; a bare number is in microseconds. null for none, undefined for what is no length of time. */
export function lengthOf(text: string): number | null | undefined {
  if (text.trim() === "") return null;
  const match = /^(\d+(?:[.,]\d*)?|[.,]\d+)(?:e([+-]?\d+))?\s*(s|ms|us|µs|μs|ns)?$/i.exec(text.trim());
  if (!match) return undefined;
  const value = Number(`${match[1].replace(",", ".")}e${match[2] ?? 0}`);
  // Rounded to what was typed, so that 5.2 µs stays 5.2e-6 and not its neighbour.
  return Number((value * SECONDS[(match[3] ?? "µs").toLowerCase()]).toPrecision(12));
}

/** "0.4 V", "180 mV", "0,4" in volts. */
export function voltsOf(text: string): number | null | undefined {
  if (text.trim() === "") return null;
  const match = /^(-?\d+(?:[.,]\d*)?|-?[.,]\d+)\s*(m?V)?$/i.exec(text.trim());
  if (!match) return undefined;
  const value = Number(match[1].replace(",", ".")) * (/^m/i.test(match[2] ?? "") ? 1e-3 : 1);
  return Number(value.toPrecision(12));
}

/** The row a draft stands for, and what is wrong with it; `entry` is null while anything is. */
export function rosterEntry(draft: RosterDraft): { readonly entry: RosterEntry | null; readonly errors: RosterErrors } {
  const errors: { [field in RosterField]?: string } = {};
  const seven = addressOf(draft.address);
  const bytes = bytesOf(draft.bytes);
  if (draft.name.trim() === "") errors.name = "a name is needed";
  if (draft.name.trim().length > 120) errors.name = "at most 120 characters";
  if (seven === undefined) errors.address = "an address such as 0x50, up to 0x7F, or 0x250 with ten bits";
  if (bytes === undefined) errors.bytes = "the address bytes such as A0/A1";
  if (typeof seven === "number" && typeof bytes === "number" && seven !== bytes)
    errors.bytes = `does not agree with ${draft.address}`;
  if (draft.role === "target" && seven === null && bytes === null) errors.address = "a target needs its address";
  const times = { tlow: lengthOf(draft.tlow), thigh: lengthOf(draft.thigh), stretch: lengthOf(draft.stretch) };
  for (const field of ["tlow", "thigh", "stretch"] as const)
    if (times[field] === undefined || (field !== "stretch" && times[field] === 0)) errors[field] = "a time such as 5.2 µs";
  const vol = voltsOf(draft.vol);
  if (vol === undefined || (vol !== null && (vol < -1 || vol > 10))) errors.vol = "a voltage such as 0.2 V";
  if (draft.registers.length > 4_000) errors.registers = "at most 4 000 characters";
  if (Object.keys(errors).length > 0) return { entry: null, errors };
  return {
    errors,
    entry: {
      role: draft.role,
      name: draft.name.trim(),
      address: seven ?? bytes ?? null,
      registers: draft.registers,
      tlow_s: times.tlow ?? null,
      thigh_s: times.thigh ?? null,
      vol_v: vol ?? null,
      stretch_allow_s: times.stretch ?? null,
    },
  };
}

/** Whether a row fits what is searched: a part of its name or registers, or its address in either notation. */
export function rosterFits(entry: RosterEntry, search: string): boolean {
  const word = search.trim().toLowerCase();
  if (word === "") return true;
  if (entry.name.toLowerCase().includes(word) || entry.registers.toLowerCase().includes(word)) return true;
  if (entry.address === null) return false;
  return addressOf(word) === entry.address || (entry.address <= 0x7f && bytesOf(word) === entry.address);
}
