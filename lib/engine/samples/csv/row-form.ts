// In: one row of a time and two readings. Out: how many decimals each of its cells has, and what reads so many of them at
// once. A form is a guess about the rows that follow, and whoever uses it checks every byte against it.

import { POWERS } from "./cell";

const LF = 10;
const CR = 13;

/** Four zeros of ASCII; and what lifts the byte of anything past nine over fifteen. */
const ZEROS = 0x30303030;
const SIXES = 0x06060606;
const TENS = 0xf0f0f0f0;
/** Of four bytes the last n: those before them do not belong to the decimals. */
export const LAST = Int32Array.of(0, 0xff000000, 0xffff0000, 0xffffff00, -1);

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
  /** Decimals of each cell that are read at once, in two masked loads; one more stands before them where `single`. */
  readonly packed = new Int32Array(CELLS);
  readonly high = new Int32Array(CELLS);
  readonly low = new Int32Array(CELLS);
  single = false;
  /** LF, or the CR of a CR LF. */
  ending = LF;
  /** Takes a time's digits to ticks. */
  multiplier = 1.5;
  /** What the whole digits of each reading are worth in units of its last decimal, and how many of those are a volt. */
  timeScale = 1.5;
  firstScale = 1.5;
  secondScale = 1.5;
  firstDivisor = 1.5;
  secondDivisor = 1.5;

  /** `powers`: of ten, from each reading's unit to volts; `timePower`: from the times' unit to ticks. */
  constructor(
    private readonly powers: Int32Array,
    private readonly timePower: number,
    private readonly delimiter: number,
    private readonly decimal: number,
  ) {}

  /** Takes the form of the row at `from`; false where it is not a row of plain numbers with decimals and whole ticks. */
  learn(bytes: Uint8Array, from: number): boolean {
    let p = from;
    const places = [0, 0, 0];
    for (let c = 0; c < CELLS; c += 1) {
      if (bytes[p] === 45) p += 1;
      const mark = pastDigits(bytes, p);
      if (mark === p || bytes[mark] !== this.decimal) return false;
      p = pastDigits(bytes, mark + 1);
      places[c] = p - mark - 1;
      if (c < CELLS - 1 && bytes[p] !== this.delimiter) return false;
      p += 1;
    }
    this.ending = bytes[p - 1];
    const ends = this.ending === LF || (this.ending === CR && bytes[p] === LF);
    return ends && p - from < ROW_ROOM / 2 && this.take(places);
  }

  private take(places: readonly number[]): boolean {
    const power = this.timePower - places[0];
    const first = places[1] - this.powers[1];
    const second = places[2] - this.powers[2];
    const exact = power >= 0 && power <= 22 && first >= 0 && first <= 22 && second >= 0 && second <= 22;
    if (!exact || places[0] > EIGHT + 1 || places[1] > EIGHT || places[2] > EIGHT || places.includes(0)) return false;
    this.single = places[0] > EIGHT;
    for (let c = 0; c < CELLS; c += 1) {
      const packed = Math.min(EIGHT, places[c]);
      this.packed[c] = packed;
      this.high[c] = LAST[Math.max(0, packed - 4)];
      this.low[c] = LAST[Math.min(4, packed)];
    }
    this.multiplier = POWERS[power];
    this.timeScale = POWERS[this.packed[0]];
    this.firstScale = POWERS[places[1]];
    this.secondScale = POWERS[places[2]];
    this.firstDivisor = POWERS[first];
    this.secondDivisor = POWERS[second];
    return true;
  }
}

function pastDigits(bytes: Uint8Array, from: number): number {
  let p = from;
  while (bytes[p] >= 48 && bytes[p] <= 57) p += 1;
  return p;
}
