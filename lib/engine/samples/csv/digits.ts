// In: bytes at the start of a cell. Out: a plain number's digits as 32-bit integers, and where it ends. The hot loop of
// every path: small enough to be inlined, and no double is stored, which is several times faster than whole numbers at once.

import { POWERS } from "./cell";

/** Of the number read last: value of the whole digits, value of the decimals, and how many decimals there are. */
export const digits = new Int32Array(3);

/** Reads [+-]digits[mark digits], at most nine on each side. Returns the position after it; -1 where it is something else. */
export function readDigits(bytes: Uint8Array, from: number, decimal: number): number {
  let p = from;
  let digit = bytes[p] - 48;
  if (digit === -3 || digit === -5) digit = bytes[++p] - 48;
  const first = p;
  let whole = 0;
  while (digit >= 0 && digit <= 9) {
    whole = (Math.imul(whole, 10) + digit) | 0;
    digit = bytes[++p] - 48;
  }
  const mark = p;
  let part = 0;
  if (bytes[p] === decimal) {
    digit = bytes[++p] - 48;
    while (digit >= 0 && digit <= 9) {
      part = (Math.imul(part, 10) + digit) | 0;
      digit = bytes[++p] - 48;
    }
  }
  const places = p === mark ? 0 : p - mark - 1;
  digits[0] = whole;
  digits[1] = part;
  digits[2] = places;
  return places > 9 || mark - first > 9 || mark - first + places === 0 ? -1 : p;
}

/** The number read last, without its sign, in units of its last decimal. */
export function mantissa(): number {
  return digits[0] * POWERS[digits[2]] + digits[1];
}

/** Value of the exponent read last. */
export const exponent = new Int32Array(1);

/** Reads e[+-]digits. Returns the position after it; -1 where it is something else. */
export function readExponent(bytes: Uint8Array, at: number): number {
  const minus = bytes[at + 1] === 45;
  let p = minus || bytes[at + 1] === 43 ? at + 2 : at + 1;
  const first = p;
  let value = 0;
  let digit = bytes[p] - 48;
  while (digit >= 0 && digit <= 9) {
    value = (Math.imul(value, 10) + digit) | 0;
    digit = bytes[++p] - 48;
  }
  exponent[0] = minus ? -value : value;
  return p === first || p - first > 4 ? -1 : p;
}
