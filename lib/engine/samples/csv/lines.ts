// In: the layout. Out: the channels it offers and where in a row each one's level stands.

import type { Channel } from "../reader";
import { type Column, type Layout, timeColumnOf } from "./layout";
import { LEVEL, SKIP, VALUE } from "./plan";

/** One channel in the values of a row. */
export interface LineSource {
  readonly channel: Channel;
  readonly column: Column;
  /** Bit of a packed word, from 0 at the right; -1 where the column is one line. */
  readonly bit: number;
}

/** Every channel of the file, usable or not, in the file's order; bits of a packed word from bit 0. */
export function lineSources(layout: Layout): LineSource[] {
  const found: LineSource[] = [];
  for (const column of layout.columns) {
    if (column.role === "time" || column.role === "ordinal") continue;
    const id = `@${column.index + 1}`;
    const unit = column.role === "volts" ? "V" : (column.unit?.symbol ?? null);
    if (column.role === "bits" || column.role === "pattern") {
      const name = column.name.replace(/\s*\[\d+:\d+\]$/, "");
      for (let bit = 0; bit < column.bits; bit += 1) {
        found.push({ channel: { id: `${id}[${bit}]`, name: `${name}[${bit}]`, unit: null, kind: "digital" }, column, bit });
      }
    } else found.push({ channel: { id, name: column.name, unit, kind: column.role }, column, bit: -1 });
  }
  return found;
}

export function usable(source: LineSource): boolean {
  return source.channel.kind !== "other";
}

export function isDigital(source: LineSource): boolean {
  return source.channel.kind === "digital";
}

/** Which columns a scanner must read for these lines, and where it puts them. */
export interface Selection {
  readonly modes: Uint8Array;
  readonly slots: Int32Array;
  readonly powers: Int32Array;
  readonly values: Float64Array;
}

export function select(layout: Layout, sources: readonly LineSource[]): Selection {
  const times = layout.ownTimes
    ? sources.map((source) => timeColumnOf(layout, source.column)).filter((column) => column !== null)
    : [];
  const wanted = [...sources.map((source) => source.column), ...times];
  const modes = new Uint8Array(layout.width).fill(SKIP);
  const slots = new Int32Array(layout.width).fill(-1);
  const powers = new Int32Array(layout.width);
  let count = 0;
  for (const column of wanted) {
    if (slots[column.index] >= 0) continue;
    slots[column.index] = count;
    modes[column.index] = column.role === "digital" ? LEVEL : VALUE;
    if (column.role === "volts" || column.role === "time") powers[column.index] = column.unit?.power ?? 0;
    count += 1;
  }
  return { modes, slots, powers, values: new Float64Array(count).fill(Number.NaN) };
}

/** Reads one digital line out of a row: 0, 1, or 2 for unknown. */
export class DigitalTap {
  private readonly slot: number;
  private readonly bit: number;
  private readonly pattern: boolean;
  private readonly divisor: number;

  constructor(
    source: LineSource,
    selection: Selection,
    readonly values: Float64Array = selection.values,
  ) {
    this.slot = selection.slots[source.column.index];
    this.bit = source.bit;
    this.pattern = source.column.role === "pattern";
    this.divisor = this.pattern ? 10 ** source.bit : 2 ** source.bit;
  }

  level(): number {
    const value = this.values[this.slot];
    if (this.bit < 0) return value;
    if (Number.isNaN(value)) return 2;
    const shifted = Math.floor(value / this.divisor);
    return this.pattern ? (shifted % 10 === 1 ? 1 : 0) : shifted % 2;
  }

  /** The slot whose value is the level itself, or -1 where it must be taken out of a word. */
  get direct(): number {
    return this.bit < 0 ? this.slot : -1;
  }
}
