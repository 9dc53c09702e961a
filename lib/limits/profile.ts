// In: published modes. Out: limits profiles: the set of limits that a capture is judged by. Times in ns, frequencies in Hz.

import { type PublishedLimit, type PublishedMode, published } from "./published/mode";

/** One limit of a profile. `min` and `max` are in `unit`; null means no limit. */
export interface Limit {
  readonly min: number | null;
  readonly max: number | null;
  readonly unit: string;
  /** Document, revision and table, or whatever a team wrote. */
  readonly source: string;
  readonly status: string;
  readonly note: string;
}

export type LimitTable = Readonly<Record<string, Limit>>;

export interface Profile {
  readonly name: string;
  /** Counts up with each change of a team's own profile; the built-in ones are version 1. */
  readonly version: number;
  /** Built-in profile this one was derived from, or null for a built-in one. */
  readonly base: string | null;
  readonly spec: "I2C" | "SMBus";
  readonly source: string;
  readonly limits: LimitTable;
  /** Limits between an Hs controller code and the STOP after it (UM10204 5.3). */
  readonly hs: LimitTable;
}

export const PROFILE_NAMES = [
  "Standard-mode",
  "Fast-mode",
  "Fast-mode Plus",
  "High-speed",
  "SMBus 2.0",
  "SMBus 3 100 kHz",
  "SMBus 3 400 kHz",
  "SMBus 3 1 MHz",
] as const;
export type ProfileName = (typeof PROFILE_NAMES)[number];

/** Modes that a capture is tried against when no profile is named, slowest first. */
export const TRIED_MODES = ["Standard-mode", "Fast-mode", "Fast-mode Plus"] as const satisfies readonly ProfileName[];

const MODE_OF: Readonly<Record<ProfileName, string>> = {
  "Standard-mode": "standard",
  "Fast-mode": "fast",
  "Fast-mode Plus": "fast_plus",
  // Outside the Hs transfer itself the bus runs at Fast-mode (UM10204 5.3.2, 5.3.3).
  "High-speed": "fast",
  "SMBus 2.0": "smbus2_100k",
  "SMBus 3 100 kHz": "smbus3_100k",
  "SMBus 3 400 kHz": "smbus3_400k",
  "SMBus 3 1 MHz": "smbus3_1M",
};

/** Bus capacitances, in pF, that the published Hs tables are printed for. */
const HS_LIGHT_PF = 100;
const HS_HEAVY_PF = 400;

export function isProfileName(name: string): name is ProfileName {
  return (PROFILE_NAMES as readonly string[]).includes(name);
}

/**
 * A built-in profile.
 * @param cbPf bus capacitance in pF for the Hs limits; null takes 100 pF, the strictest table
 */
export function builtIn(name: ProfileName, cbPf: number | null = null): Profile {
  const mode = published(MODE_OF[name]);
  return {
    name,
    version: 1,
    base: null,
    spec: mode.spec === "SMBus" ? "SMBus" : "I2C",
    source: mode.spec !== "SMBus" ? "UM10204" : name === "SMBus 2.0" ? "SMBus 2.0" : "SMBus 3.x",
    limits: tableOf(mode),
    hs: highSpeedTable(cbPf ?? HS_LIGHT_PF),
  };
}

function tableOf(mode: PublishedMode): LimitTable {
  return Object.fromEntries(Object.entries(mode.parameters).map(([symbol, limit]) => [symbol, limitOf(limit)]));
}

function limitOf(limit: PublishedLimit): Limit {
  const { min, max, unit, source, status, note } = limit;
  return { min, max, unit, source, status, note };
}

/** Hs limits at a bus capacitance; linear between the two printed tables (UM10204 Rev 6 6.2 and Table 12 note 2). */
export function highSpeedTable(cbPf: number): LimitTable {
  const light = tableOf(published("hs_100pF"));
  const heavy = tableOf(published("hs_400pF"));
  const share = Math.min(1, Math.max(0, (cbPf - HS_LIGHT_PF) / (HS_HEAVY_PF - HS_LIGHT_PF)));
  const between = (a: number | null, b: number | null) => (a === null || b === null ? a : a + (b - a) * share);
  return Object.fromEntries(
    Object.entries(light).map(([symbol, limit]) => {
      const other = heavy[symbol] ?? limit;
      return [symbol, { ...limit, min: between(limit.min, other.min), max: between(limit.max, other.max) }];
    }),
  );
}

/** Marks a limit that holds between an Hs controller code and its STOP: tLOW (Hs). */
const HS_MARK = " (Hs)";

/** Both tables of a profile in one, as changes name them: the Hs limits are marked. */
export function allLimits(profile: Pick<Profile, "limits" | "hs">): LimitTable {
  const hs = Object.entries(profile.hs).map(([symbol, limit]) => [`${symbol}${HS_MARK}`, limit] as const);
  return { ...profile.limits, ...Object.fromEntries(hs) };
}

export function isHsName(name: string): boolean {
  return name.endsWith(HS_MARK);
}

/** Changed values of a derived profile: only what differs from its base, under the names of `allLimits`. */
export type Changes = Readonly<
  Record<string, { readonly min?: number | null; readonly max?: number | null; readonly source?: string }>
>;

/** A team's own profile: a copy of `base` with some values changed, each marked as the team's. */
export function derive(base: Profile, name: string, version: number, changes: Changes): Profile {
  const limits: Record<string, Limit> = { ...base.limits };
  const hs: Record<string, Limit> = { ...base.hs };
  for (const [named, change] of Object.entries(changes)) {
    const table = isHsName(named) ? hs : limits;
    const symbol = isHsName(named) ? named.slice(0, -HS_MARK.length) : named;
    const from = table[symbol] ?? { min: null, max: null, unit: unitOf(symbol), source: "", status: "TEAM", note: "" };
    table[symbol] = {
      ...from,
      min: change.min === undefined ? from.min : change.min,
      max: change.max === undefined ? from.max : change.max,
      source: change.source ?? `${name} version ${version}`,
      status: "TEAM",
    };
  }
  return { ...base, name, version, base: base.name, source: `${name} version ${version}, derived from ${base.name}`, limits, hs };
}

export function unitOf(symbol: string): string {
  return symbol.startsWith("f") ? "Hz" : "ns";
}
