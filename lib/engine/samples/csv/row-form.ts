// In: one row of plain numbers. Out: how many decimals each of its cells has, and what reads so many of them at once. A form
// is a guess about the rows that follow, and whoever uses it checks every byte against it.

import { POWERS } from "./cell";

const LF = 10;
const CR = 13;

/** Four zeros of ASCII; and what lifts the byte of anything past nine over fifteen. */
const ZEROS = 0x30303030;
const SIXES = 0x06060606;
const TENS = 0xf0f0f0f0;
/** Of four bytes the last n: those before them do not belong to the decimals. */
const LAST = Int32Array.of(0, 0xff000000, 0xffff0000, 0xffffff00, -1);

/** Digits beyond these may not be exact in a double, or pass 32 bits before the mark. */
const MOST_DIGITS = 15;
const MOST_WHOLE = 9;
/** Decimals that are read in two loads of four bytes. */
const EIGHT = 8;

/** Value of the eight bytes before `end`, of which `high` and `low` keep the digits; -1 where one is none. */
export function lastDigits(view: DataView, end: number, high: number, low: number): number {
  const h = (view.getInt32(end - 8, true) ^ ZEROS) & high;
  const l = (view.getInt32(end - 4, true) ^ ZEROS) & low;
  if (((h | (h + SIXES) | l | (l + SIXES)) & TENS) !== 0) return -1;
  const hundreds = Math.imul(h, 10) + (h >>> 8);
  const units = Math.imul(l, 10) + (l >>> 8);
  return ((hundreds & 0xff) * 100 + ((hundreds >>> 16) & 0xff)) * 10_000 + ((units & 0xff) * 100 + ((units >>> 16) & 0xff));
}

/** The same for at most four. */
export function lastFour(view: DataView, end: number, mask: number): number {
  const four = (view.getInt32(end - 4, true) ^ ZEROS) & mask;
  if (((four | (four + SIXES)) & TENS) !== 0) return -1;
  const pairs = Math.imul(four, 10) + (four >>> 8);
  return (pairs & 0xff) * 100 + ((pairs >>> 16) & 0xff);
}

/** Bytes that must be there to read a row without looking for the end. */
export const ROW_ROOM = 128;

/** A time and two readings. */
const CELLS = 3;

export class RowForm {
  /** Decimals of each cell, and how many of them are read at once, in two masked loads; the rest one by one before. */
  readonly places = new Int32Array(CELLS);
  readonly packed = new Int32Array(CELLS);
  readonly single = new Int32Array(CELLS);
  readonly high = new Int32Array(CELLS);
  readonly low = new Int32Array(CELLS);
  /** Digits that may stand before the mark. */
  readonly whole = new Int32Array(CELLS);
  /** Power of ten by which a cell's digits are divided, its exponent aside. */
  readonly divisors = new Int32Array(CELLS);
  /** LF, or the CR of a CR LF. */
  ending = LF;
  /** No cell has an exponent, all have decimals, and times are whole ticks. */
  plain = false;
  /** The same by name, for plain rows; `multiplier` takes a time's digits to ticks. */
  multiplier = 1;
  timeScale = 1;
  firstScale = 1;
  secondScale = 1;
  firstDivisor = 1;
  secondDivisor = 1;

  /** `powers`: of ten, from each reading's unit to volts; `timePower`: from the times' unit to ticks. */
  constructor(
    private readonly powers: Int32Array,
    private readonly timePower: number,
    private readonly delimiter: number,
    private readonly decimal: number,
  ) {}

  /** Takes the form of the row at `from`; false where it is not a row of plain numbers. */
  learn(bytes: Uint8Array, from: number): boolean {
    let p = from;
    let exponents = false;
    for (let c = 0; c < CELLS; c += 1) {
      if (bytes[p] === 45) p += 1;
      const first = p;
      p = pastDigits(bytes, p);
      if (p === first) return false;
      let places = 0;
      if (bytes[p] === this.decimal) {
        places = pastDigits(bytes, p + 1) - p - 1;
        p += 1 + places;
        if (places === 0) return false;
      }
      if ((bytes[p] | 32) === 101) {
        exponents = true;
        p = pastDigits(bytes, bytes[p + 1] === 45 || bytes[p + 1] === 43 ? p + 2 : p + 1);
      }
      if (c < CELLS - 1 && bytes[p] !== this.delimiter) return false;
      p += 1;
      if (!this.keep(c, places)) return false;
    }
    this.ending = bytes[p - 1];
    this.name(exponents);
    return (this.ending === LF || (this.ending === CR && bytes[p] === LF)) && p - from < ROW_ROOM / 2;
  }

  private name(exponents: boolean): void {
    const { packed, places, divisors } = this;
    const power = this.timePower - places[0];
    const whole = power >= 0 && power <= 22 && places[0] <= 9;
    const scaled = divisors[1] >= 0 && divisors[1] <= 22 && divisors[2] >= 0 && divisors[2] <= 22;
    this.plain = !exponents && whole && scaled && packed.every((n) => n > 0);
    if (!this.plain) return;
    this.multiplier = POWERS[power];
    this.timeScale = POWERS[packed[0]];
    this.firstScale = POWERS[packed[1]];
    this.secondScale = POWERS[packed[2]];
    this.firstDivisor = POWERS[divisors[1]];
    this.secondDivisor = POWERS[divisors[2]];
  }

  private keep(c: number, places: number): boolean {
    const packed = Math.min(EIGHT, places);
    this.places[c] = places;
    this.packed[c] = packed;
    this.single[c] = places - packed;
    this.high[c] = LAST[Math.max(0, packed - 4)];
    this.low[c] = LAST[Math.min(4, packed)];
    this.whole[c] = Math.min(MOST_WHOLE - this.single[c], MOST_DIGITS - places);
    this.divisors[c] = places - this.powers[c];
    return this.whole[c] > 0 && (c === 0 || places === packed);
  }
}

function pastDigits(bytes: Uint8Array, from: number): number {
  let p = from;
  while (bytes[p] >= 48 && bytes[p] <= 57) p += 1;
  return p;
}
