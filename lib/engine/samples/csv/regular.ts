// In: whole rows. Out: the regular ones in a block: levels of one byte, and plain numbers of up to fifteen digits. The hot
// loop of the scanner. It calls nothing that is not inlined and leaves whatever it does not know to the full grammar, a row at
// a time: a call on a rare path costs every row here more than its digits do.

import type { RowBlock } from "./block";
import { Cell, POWERS, scaled } from "./cell";
import { INSTANT, LEVEL, type ScanPlan, SKIP } from "./plan";

const CR = 13;
const LF = 10;
/** Digits on one side of the mark that are exact in 32 bits, and on both sides in a double. */
const FEW_DIGITS = 9;
const MOST_DIGITS = 15;

const BLANKS = [9, 32, 0xa0];
const cell = new Cell();
/** What a cell of a single byte says as a level, by the full grammar; -1 where it says none, or where the cell is empty. */
const LEVELS = Int8Array.from({ length: 256 }, (_, byte) => {
  cell.read(Uint8Array.of(byte), 0, 1, 0);
  return BLANKS.includes(byte) ? -1 : cell.level();
});

/** Appends rows to the block until it has `most`; returns the position after the last one, where one begins that is left. */
export function readRows(bytes: Uint8Array, from: number, to: number, plan: ScanPlan, block: RowBlock, most: number): number {
  const { modes, slots, width, powers, clock } = plan;
  const [delimiter, decimal] = [plan.dialect.delimiter.charCodeAt(0), plan.dialect.decimal.charCodeAt(0)];
  const { power, start, factor } = clock;
  const scale = factor ?? 1;
  const { readings, ticks } = block;
  let n = block.length;
  let row = from;
  rows: for (; n < most && row < to; n += 1) {
    const base = n * block.width;
    let p = row;
    for (let column = 0; ; ) {
      const mode = modes[column];
      let b = bytes[p];
      while (b === 32) b = bytes[++p];
      if (mode === LEVEL) {
        if (LEVELS[b] < 0) break rows;
        readings[base + slots[column]] = LEVELS[b];
        b = bytes[++p];
      } else if (mode === SKIP) {
        // A blank at the end of a row parted by blanks is no cell.
        if (delimiter === 32 && (b === LF || b === CR)) break rows;
        while (b !== delimiter && b !== LF && b !== CR) b = bytes[++p];
      } else {
        const negative = b === 45;
        if (negative || b === 43) b = bytes[++p];
        const first = p;
        let whole = 0;
        while (b >= 48 && b <= 57) {
          whole = (Math.imul(whole, 10) + b - 48) | 0;
          b = bytes[++p];
        }
        const mark = p;
        let part = 0;
        let places = 0;
        if (b === decimal) {
          b = bytes[++p];
          while (b >= 48 && b <= 57) {
            part = (Math.imul(part, 10) + b - 48) | 0;
            b = bytes[++p];
          }
          places = p - mark - 1;
        }
        const count = mark - first + places;
        if (count === 0 || count > MOST_DIGITS) break rows;
        const few = mark - first <= FEW_DIGITS && places <= FEW_DIGITS;
        const digits = few ? whole * POWERS[places] + part : manyDigits(bytes, first, p, decimal);
        const m = negative ? -digits : digits;
        let e = -places;
        if ((b | 32) === 101) {
          b = bytes[++p];
          const minus = b === 45;
          if (minus || b === 43) b = bytes[++p];
          const begin = p;
          let shift = 0;
          while (b >= 48 && b <= 57) {
            shift = (Math.imul(shift, 10) + b - 48) | 0;
            b = bytes[++p];
          }
          if (p === begin || p - begin > 4) break rows;
          e = minus ? (e - shift) | 0 : (e + shift) | 0;
        }
        if (mode === INSTANT) {
          if (factor !== null && e !== 0) break rows;
          ticks[n] = Math.round(scaled(m, e + power) * scale + start) + 0;
        } else readings[base + slots[column]] = scaled(m, e + powers[column]);
      }
      column += 1;
      if (b === delimiter) b = bytes[++p];
      else if (column < width) break rows;
      if (column < width) continue;
      if (b !== LF && b !== CR) break rows;
      row = p + 1;
      if (b === CR && row < to && bytes[row] === LF) row += 1;
      break;
    }
  }
  block.length = n;
  return row;
}

/** Value of all digits from `from` to `to`, the mark between them left out: exact up to fifteen. */
function manyDigits(bytes: Uint8Array, from: number, to: number, decimal: number): number {
  let value = 0;
  for (let p = from; p < to; p += 1) if (bytes[p] !== decimal) value = value * 10 + bytes[p] - 48;
  return value;
}
