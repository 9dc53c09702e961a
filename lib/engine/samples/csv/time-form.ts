// In: one row that begins with a time. Out: how many digits the time has, and what reads so many of them at once. A form is a
// guess about the rows that follow, and whoever uses it checks every byte against it.

import { POWERS } from "./cell";
import { LAST } from "./row-form";

/** Digits that are read in two loads of four bytes, and those that are exact in a double. */
const EIGHT = 8;
const MOST_DIGITS = 15;
const MINUS = 45;

/** A time is [-]head[.][middle]tail: the tail is eight digits at most, the mark stands after the head, or nowhere. */
export class TimeForm {
  /** Bytes of the sign, and positions behind it at which the groups of digits end. */
  sign = 0;
  headEnd = 0;
  middleEnd = 0;
  tailEnd = 0;
  marked = false;
  middle = false;
  /** Masks of the groups for `lastDigits`. */
  headHigh = 0;
  headLow = 0;
  middleHigh = 0;
  middleLow = 0;
  tailHigh = 0;
  tailLow = 0;
  middleScale = 1.5;
  tailScale = 1.5;
  /** Digits after the mark. */
  places = 0;

  /** Takes the form of the time at `from`; false where it is no plain number, or too long a one. */
  learn(bytes: Uint8Array, from: number, decimal: number): boolean {
    this.sign = bytes[from] === MINUS ? 1 : 0;
    const first = from + this.sign;
    const mark = pastDigits(bytes, first);
    this.marked = bytes[mark] === decimal;
    const end = this.marked ? pastDigits(bytes, mark + 1) : mark;
    const places = this.marked ? end - mark - 1 : 0;
    const whole = mark - first;
    if (whole === 0 || (this.marked && places === 0) || whole + places > MOST_DIGITS) return false;
    this.places = places;
    const tail = this.marked ? Math.min(EIGHT, places) : Math.min(EIGHT, whole - 1);
    const middle = this.marked ? places - tail : 0;
    const head = this.marked ? whole : whole - tail;
    if (head > EIGHT || middle > EIGHT) return false;
    this.headEnd = head;
    this.tailEnd = end - first;
    this.middleEnd = this.tailEnd - tail;
    this.middle = middle > 0;
    this.headHigh = LAST[Math.max(0, head - 4)];
    this.headLow = LAST[Math.min(4, head)];
    this.middleHigh = LAST[Math.max(0, middle - 4)];
    this.middleLow = LAST[Math.min(4, middle)];
    this.tailHigh = LAST[Math.max(0, tail - 4)];
    this.tailLow = LAST[Math.min(4, tail)];
    this.middleScale = POWERS[middle];
    this.tailScale = POWERS[tail];
    return true;
  }
}

function pastDigits(bytes: Uint8Array, from: number): number {
  let p = from;
  while (bytes[p] >= 48 && bytes[p] <= 57) p += 1;
  return p;
}
