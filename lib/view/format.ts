// In: ticks, seconds, volts, addresses, counts. Out: how they are written on the page: grouped in threes, engineering
// units, both address forms. One way for each, used by the screen, its descriptions and the print.

import type { Timebase } from "../base/time";
import { figure } from "../diagnosis/format";

/** Keeps a number and its groups on one line. */
const GAP = "\u00a0";
const MINUS = "\u2212";

/** "1604" as "1 604"; four digits and more are grouped. */
export function count(value: number): string {
  return String(value).replace(/\B(?=(\d{3})+$)/g, GAP);
}

function grouped(fraction: string): string {
  return fraction.replace(/(\d{3})(?=\d)/g, `$1${GAP}`);
}

/** Seconds with `digits` decimals in groups of three: 1.4820614 as "1.482 061 4". */
export function groupedSeconds(value: number, digits: number): string {
  const [whole, fraction = ""] = Math.abs(value).toFixed(digits).split(".");
  const sign = value < 0 ? MINUS : "";
  return `${sign}${count(Number(whole))}${fraction ? `.${grouped(fraction)}` : ""}`;
}

/** Decimals that the resolution of a capture carries: one sample, or one tick where there are only change times; at most 9. */
export function timeDigits(base: Timebase, sampleTicks: number | null): number {
  if (base.origin === "assumed") return 0;
  const resolution = (sampleTicks ?? 1) / base.ticksPerSecond;
  return Math.max(0, Math.min(9, Math.ceil(-Math.log10(resolution) - 1e-9)));
}

/** Where an instant stands on the capture's own axis, as a row shows it. */
export function instant(tick: number, base: Timebase, digits: number): string {
  if (base.origin === "assumed") return `#${count(Math.round(tick))}`;
  return groupedSeconds(tick / base.ticksPerSecond, digits);
}

const UNITS = [
  [1, "s"],
  [1e-3, "ms"],
  [1e-6, "µs"],
  [1e-9, "ns"],
  [1e-12, "ps"],
] as const;

/** A length of time with three significant digits and its unit: 43.4 µs, 250 ns, 2.00 s. */
export function duration(seconds: number): string {
  const size = Math.abs(seconds);
  if (size === 0) return `0${GAP}s`;
  const sign = seconds < 0 ? MINUS : "";
  const [factor, unit] = UNITS.find(([step]) => size >= step * 0.9995) ?? [1e-12, "ps"];
  const value = size / factor;
  const digits = value >= 99.95 ? 0 : value >= 9.995 ? 1 : 2;
  const written = value >= 999.5 ? count(Math.round(value)) : value.toFixed(digits);
  return `${sign}${written}${GAP}${unit}`;
}

/** A measured time beside its limit: with more digits where three would make the two the same. */
export function beside(seconds: number, limit: number): string {
  const text = duration(seconds);
  return seconds === limit || text !== duration(limit) ? text : figure(seconds, [limit]).replace(" ", GAP);
}

/** The same where ticks are sample numbers and no second is known. */
export function span(ticks: number, base: Timebase): string {
  return base.origin === "assumed" ? `${count(Math.round(ticks))}${GAP}samples` : duration(ticks / base.ticksPerSecond);
}

/** A label of a time axis with just the decimals its step needs. */
export function axisTime(seconds: number, step: number, base: Timebase): string {
  if (base.origin === "assumed") return `#${count(Math.round(seconds))}`;
  const digits = Math.max(0, Math.min(12, Math.ceil(-Math.log10(step) - 1e-9)));
  return `${groupedSeconds(seconds === 0 ? 0 : seconds, digits)}${GAP}s`;
}

export function volts(value: number): string {
  return Number.isNaN(value) ? "–" : `${value.toFixed(2).replace("-", MINUS)}${GAP}V`;
}

/** One byte as two hexadecimal digits. */
export function hex(value: number): string {
  return value.toString(16).toUpperCase().padStart(2, "0");
}

/** 7-bit "0x50", 10-bit "0x250"; a dash where the bits were never sent. */
export function address(value: number, bits: number): string {
  if (value < 0) return "–";
  return `0x${value
    .toString(16)
    .toUpperCase()
    .padStart(bits === 10 ? 3 : 2, "0")}`;
}

/** The byte forms of a 7-bit address as data sheets print them, write and read: "A0/A1". Empty for 10-bit addresses. */
export function addressBytes(value: number, bits: number): string {
  return value < 0 || bits !== 7 ? "" : `${hex(value << 1)}/${hex((value << 1) | 1)}`;
}

/** Bits of log-odds with their sign: "+6.2", "−5.0". */
export function evidenceBits(value: number): string {
  return `${value < 0 ? MINUS : "+"}${Math.abs(value).toFixed(1)}`;
}

/** A probability never rounds to certainty: 0.997 stays below 1.00. */
export function probability(value: number): string {
  return value >= 0.995 && value < 1 ? "> 0.99" : value > 0 && value < 0.005 ? "< 0.01" : value.toFixed(2);
}
