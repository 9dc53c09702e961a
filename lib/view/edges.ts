// In: edge blocks as the worker hands them over, kept and never copied. Out: the levels at any instant, and how often a line
// changed in any span, exactly and without walking the span: what every drawing of a trace asks for.

import type { EdgeBlock } from "../engine/samples/edges";
import { SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../engine/samples/edges";
import { BlockIndex } from "./columns";

export type Line = "scl" | "sda";
export const LINE_BITS: Record<Line, number> = { scl: SCL | SCL_UNKNOWN, sda: SDA | SDA_UNKNOWN };
const LEVEL_BIT: Record<Line, number> = { scl: SCL, sda: SDA };
const UNKNOWN_BIT: Record<Line, number> = { scl: SCL_UNKNOWN, sda: SDA_UNKNOWN };

/** Entries between two stored counts; a count at any place walks less than this. */
const STRIDE = 64;

/** Level of a line: 0, 1, or 2 for unknown. */
export function levelOf(lines: number, line: Line): 0 | 1 | 2 {
  if (lines & UNKNOWN_BIT[line]) return 2;
  return lines & LEVEL_BIT[line] ? 1 : 0;
}

interface Kept {
  readonly block: EdgeBlock;
  /** Levels before its first entry; its own first for the very first block, which is no change. */
  readonly before: number;
  /** Changes of each line in the whole capture before every STRIDE-th entry. */
  readonly changes: Record<Line, Float64Array>;
}

export class EdgeColumns {
  readonly #index = new BlockIndex();
  readonly #kept: Kept[] = [];
  #totals: Record<Line, number> = { scl: 0, sda: 0 };
  #last = 0;

  get length(): number {
    return this.#index.total;
  }

  append(block: EdgeBlock): void {
    if (block.length === 0) return;
    const before = this.#kept.length === 0 ? block.lines[0] : this.#last;
    this.#kept.push({ block, before, changes: this.#count(block, before) });
    this.#index.append(block.length);
    this.#last = block.lines[block.length - 1];
  }

  #count(block: EdgeBlock, before: number): Record<Line, Float64Array> {
    const places = Math.floor(block.length / STRIDE) + 1;
    const scl = new Float64Array(places);
    const sda = new Float64Array(places);
    let sclTotal = this.#totals.scl;
    let sdaTotal = this.#totals.sda;
    let previous = before;
    for (let k = 0; k < block.length; k++) {
      if (k % STRIDE === 0) {
        scl[k / STRIDE] = sclTotal;
        sda[k / STRIDE] = sdaTotal;
      }
      const differs = block.lines[k] ^ previous;
      if (differs & LINE_BITS.scl) sclTotal++;
      if (differs & LINE_BITS.sda) sdaTotal++;
      previous = block.lines[k];
    }
    if (block.length % STRIDE === 0) {
      scl[places - 1] = sclTotal;
      sda[places - 1] = sdaTotal;
    }
    this.#totals = { scl: sclTotal, sda: sdaTotal };
    return { scl, sda };
  }

  tick(index: number): number {
    const number = this.#index.block(index);
    return this.#kept[number].block.ticks[index - this.#index.start(number)];
  }

  /** Levels after entry `index`; before the first entry those of the first; low where there is none at all. */
  lines(index: number): number {
    if (this.length === 0) return 0;
    const at = Math.max(0, index);
    const number = this.#index.block(at);
    return this.#kept[number].block.lines[at - this.#index.start(number)];
  }

  /** The block of an entry and the entry's place in it, for loops over many. */
  at(index: number): { readonly block: EdgeBlock; readonly offset: number } {
    const number = this.#index.block(index);
    return { block: this.#kept[number].block, offset: index - this.#index.start(number) };
  }

  /** How many times `line` changed at entries before `index` (0 <= index <= length). */
  changesBefore(line: Line, index: number): number {
    if (index <= 0) return 0;
    if (index >= this.length) return this.#totals[line];
    const number = this.#index.block(index);
    const { block, before, changes } = this.#kept[number];
    const offset = index - this.#index.start(number);
    const place = Math.floor(offset / STRIDE);
    let total = changes[line][place];
    let previous = place === 0 ? before : block.lines[place * STRIDE - 1];
    const bits = LINE_BITS[line];
    for (let k = place * STRIDE; k < offset; k++) {
      if ((block.lines[k] ^ previous) & bits) total++;
      previous = block.lines[k];
    }
    return total;
  }

  /**
   * Index of the first entry at or after `tick`; `length` where there is none. `from` is an entry known to lie at or before
   * the answer: the search gallops from there, so a walk over neighbouring pixels costs a few steps each.
   */
  seek(tick: number, from = 0): number {
    const total = this.length;
    let low = from;
    let reach = 1;
    while (low + reach < total && this.tick(low + reach) < tick) {
      low += reach;
      reach *= 2;
    }
    let high = Math.min(total, low + reach);
    while (low < high) {
      const middle = low + Math.floor((high - low) / 2);
      if (this.tick(middle) < tick) low = middle + 1;
      else high = middle;
    }
    return low;
  }
}
