// In: numbers. Out: the same as people in the trade write them, for details, ledes and text reports.

import type { Row } from "./rule";

/** 0x3C: two digits at least. */
export function hex(value: number): string {
  return `0x${value.toString(16).toUpperCase().padStart(2, "0")}`;
}

const UNITS: readonly (readonly [number, string])[] = [
  [1, "s"],
  [1e-3, "ms"],
  [1e-6, "µs"],
  [1e-9, "ns"],
];

const DIGITS = 4;
/** Digits beyond which two times of a capture are the same: a picosecond in a second. */
const ALL_DIGITS = 12;

/** A time in seconds with up to four significant digits: 4.7 µs, 250 ns. */
export function duration(seconds: number): string {
  return written(seconds, DIGITS);
}

function written(seconds: number, digits: number): string {
  if (seconds === 0) return "0 ns";
  const size = Math.abs(seconds);
  const [scale, unit] = UNITS.find(([from]) => size >= from * 0.9999995) ?? UNITS[UNITS.length - 1];
  return `${Number((seconds / scale).toPrecision(digits))} ${unit}`;
}

/** A measured time beside its limits: with so many digits more as part the two, where they are not the same. */
export function figure(seconds: number, limits: readonly (number | null)[]): string {
  for (let digits = DIGITS; digits <= ALL_DIGITS; digits++) {
    const text = written(seconds, digits);
    if (!limits.some((limit) => limit !== null && limit !== seconds && written(limit, digits) === text)) return text;
  }
  return duration(seconds);
}

/** A resistance with three significant digits: 967 Ω, 1.77 kΩ. */
export function resistance(ohm: number): string {
  return ohm >= 999.5 ? `${Number((ohm / 1000).toPrecision(3))} kΩ` : `${Number(ohm.toPrecision(3))} Ω`;
}

export function capacitance(farad: number): string {
  return `${Number((farad * 1e12).toPrecision(3))} pF`;
}

/** A place in time, seconds with all digits that matter. */
export function instant(seconds: number): string {
  return `${Number(seconds.toPrecision(12))} s`;
}

/** A rate in Hz: 400 kHz, 20 MS/s. */
export function rate(hertz: number, unit: "Hz" | "S/s"): string {
  if (hertz >= 999_950) return `${Number((hertz / 1e6).toPrecision(4))} M${unit}`;
  if (hertz >= 999.95) return `${Number((hertz / 1e3).toPrecision(4))} k${unit}`;
  return `${Number(hertz.toPrecision(4))} ${unit}`;
}

/** Both notations, so that a search by either finds it: 0x3C (8-bit 0x78 write). 10-bit addresses have one. */
export function addressText(row: Pick<Row, "address" | "addressBits" | "direction">): string {
  if (row.address < 0) return "an address that was not sent whole";
  const way = row.direction === 1 ? "read" : "write";
  if (row.addressBits === 10) return `10-bit address ${hex(row.address)} (${way})`;
  return `address ${hex(row.address)} (8-bit ${hex((row.address << 1) | (row.direction === 1 ? 1 : 0))}, ${way})`;
}

/** Where a broken transaction broke. */
export function brokenPlace(row: Row): string {
  const nth = row.byteCount - 1;
  const bits = nth >= 0 ? row.bytes.bits[row.at + nth] : 0;
  const which =
    nth < row.addressBytes || (nth === 0 && row.addressBytes === 0) ? "the address byte" : `data byte ${nth - row.addressBytes}`;
  return bits === 8 ? `in place of the acknowledge of ${which}` : `after ${bits} ${bits === 1 ? "bit" : "bits"} of ${which}`;
}

/**
 * Who had the lines last, as far as framing tells: in a read the target sends data and the controller acknowledges.
 * @param pulses SCL pulses since START
 */
export function lastDriver(pulses: number, read: boolean): string {
  const slot = pulses % 9;
  if (pulses < 9)
    return pulses === 8 ? "the target was due to acknowledge its address" : "the controller was sending the address";
  const byte = Math.floor(pulses / 9) - 1;
  if (slot === 0) return `between bytes, after the acknowledge of byte ${byte}`;
  const sender = read ? "the target was sending" : "the controller was sending";
  const other = read ? "the controller was due to acknowledge" : "the target was due to acknowledge";
  return slot === 8 ? `${other} data byte ${byte}` : `${sender} data byte ${byte}, after ${slot} ${slot === 1 ? "bit" : "bits"}`;
}
