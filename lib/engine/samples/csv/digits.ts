// In: bytes at the start of a cell. Out: a plain number's mantissa and exponent, and where it ends. The hot loop of every
// path: whole and fractional digits are gathered in 32-bit integers, which is several times faster than in doubles.

import { POWERS } from "./cell";

/** Mantissa and exponent of the number read last. */
export const number = new Float64Array(2);

/**
 * Reads [+-]digits[mark digits][e[+-]digits]. Returns the position after it; -1 where the cell is something else or has
 * more than fifteen digits, and the full grammar must read it.
 */
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
  const point = p;
  let part = 0;
  if (bytes[p] === decimal) {
    digit = bytes[++p] - 48;
    while (digit >= 0 && digit <= 9) {
      part = (Math.imul(part, 10) + digit) | 0;
      digit = bytes[++p] - 48;
    }
  }
  const places = p > point ? p - point - 1 : 0;
  if (places > 9 || point - first > 9 || point - first + places === 0) return longDigits(bytes, from, decimal);
  const mantissa = whole * POWERS[places] + part;
  number[0] = bytes[from] === 45 ? -mantissa : mantissa;
  number[1] = -places;
  return digit === 21 || digit === 53 ? power(bytes, p) : p;
}

/** The exponent after an "e" at `at`. */
function power(bytes: Uint8Array, at: number): number {
  const minus = bytes[at + 1] === 45;
  let p = minus || bytes[at + 1] === 43 ? at + 2 : at + 1;
  const first = p;
  let value = 0;
  let digit = bytes[p] - 48;
  while (digit >= 0 && digit <= 9) {
    value = (Math.imul(value, 10) + digit) | 0;
    p += 1;
    digit = bytes[p] - 48;
  }
  if (p === first || p - first > 4) return -1;
  number[1] += minus ? -value : value;
  return p;
}

/** The same for more than nine digits on one side of the mark, in doubles. */
function longDigits(bytes: Uint8Array, from: number, decimal: number): number {
  let p = from;
  const negative = bytes[p] === 45;
  if (negative || bytes[p] === 43) p += 1;
  let mantissa = 0;
  let digits = 0;
  let places = 0;
  let fraction = false;
  for (;;) {
    const digit = bytes[p] - 48;
    if (digit >= 0 && digit <= 9) {
      mantissa = mantissa * 10 + digit;
      digits += 1;
      if (fraction) places += 1;
    } else if (bytes[p] === decimal && !fraction) fraction = true;
    else break;
    p += 1;
  }
  if (digits === 0 || digits > 15) return -1;
  number[0] = negative ? -mantissa : mantissa;
  number[1] = -places;
  return bytes[p] === 69 || bytes[p] === 101 ? power(bytes, p) : p;
}
