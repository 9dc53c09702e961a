// In: changes of nets as a VCD writes them. Out: levels and voltages of slots; a slot is one line that somebody follows:
// a scalar, one bit of a vector or port, or a real. Several slots may follow one net.

import type { ChangeSink } from "./vcd-scan";

export const LOW = 0;
export const HIGH = 1;
export const UNKNOWN = 2;
/** z: nobody drives. */
export const RELEASED = 3;

const LEVEL = new Uint8Array(256).fill(UNKNOWN);
/** Port states, who drives left aside: D L d l 0 low, U H u h 1 high, Z T nobody. */
const STATE = new Uint8Array(256).fill(UNKNOWN);
for (const [letters, level] of [
  ["0lL", LOW],
  ["1hH", HIGH],
  ["zZ", RELEASED],
] as const) {
  for (const c of letters) LEVEL[c.charCodeAt(0)] = level;
}
for (const [letters, level] of [
  ["DLdl0", LOW],
  ["UHuh1", HIGH],
  ["ZT", RELEASED],
] as const) {
  for (const c of letters) STATE[c.charCodeAt(0)] = level;
}

/** What a slot follows: `bit` counts from the right; `real` reads volts. */
export interface Slot {
  readonly net: number;
  readonly bit: number;
  readonly real: boolean;
}

/** Told at the end of each instant in which a followed slot was written (also when it was written its old value). */
export interface InstantListener {
  instant(tick: number, written: Int32Array, count: number): void;
  cut(): void;
}

/** The present of every slot. */
export class Slots implements ChangeSink {
  readonly level: Uint8Array;
  readonly volts: Float64Array;
  /** Slots of net n: entries `ends[n]` to `ends[n + 1]` of `ofNets`. Flat, as a dump may declare a million nets. */
  private readonly ofNets: Int32Array;
  private readonly ends: Int32Array;
  private readonly written: Int32Array;
  private readonly isWritten: Uint8Array;
  private count = 0;

  constructor(
    private readonly slots: readonly Slot[],
    nets: number,
    private readonly listener: InstantListener,
  ) {
    this.level = new Uint8Array(slots.length).fill(UNKNOWN);
    this.volts = new Float64Array(slots.length).fill(Number.NaN);
    this.written = new Int32Array(slots.length);
    this.isWritten = new Uint8Array(slots.length);
    this.ends = new Int32Array(nets + 1);
    for (const slot of slots) this.ends[slot.net + 1]++;
    for (let net = 0; net < nets; net++) this.ends[net + 1] += this.ends[net];
    this.ofNets = new Int32Array(slots.length);
    const next = this.ends.slice();
    slots.forEach((slot, index) => {
      this.ofNets[next[slot.net]++] = index;
    });
  }

  scalar(net: number, value: number): void {
    for (let k = this.ends[net]; k < this.ends[net + 1]; k++) {
      const slot = this.ofNets[k];
      const { bit } = this.slots[slot];
      this.level[slot] = bit > 0 && (value === 48 || value === 49) ? LOW : LEVEL[value];
      this.note(slot);
    }
  }

  vector(net: number, digits: Uint8Array, from: number, to: number, port: boolean): void {
    const table = port ? STATE : LEVEL;
    for (let k = this.ends[net]; k < this.ends[net + 1]; k++) {
      const slot = this.ofNets[k];
      const at = to - 1 - this.slots[slot].bit;
      // A shortened vector is right-justified; 0 and 1 extend with 0, any other digit with itself (18.2.2).
      const first = digits[from];
      const extension = first === 48 || first === 49 ? LOW : table[first];
      this.level[slot] = at >= from ? table[digits[at]] : extension;
      this.note(slot);
    }
  }

  real(net: number, digits: Uint8Array, from: number, to: number): void {
    let text = "";
    for (let i = from; i < to && i < from + 40; i++) text += String.fromCharCode(digits[i]);
    const value = text === "" ? Number.NaN : Number(text);
    for (let k = this.ends[net]; k < this.ends[net + 1]; k++) {
      const slot = this.ofNets[k];
      this.volts[slot] = Number.isFinite(value) ? value : Number.NaN;
      this.note(slot);
    }
  }

  off(): void {
    this.level.fill(UNKNOWN);
    this.volts.fill(Number.NaN);
    for (let slot = 0; slot < this.slots.length; slot++) this.note(slot);
    this.listener.cut();
  }

  cut(): void {
    this.listener.cut();
  }

  settle(tick: number): void {
    this.listener.instant(tick, this.written, this.count);
    for (let k = 0; k < this.count; k++) this.isWritten[this.written[k]] = 0;
    this.count = 0;
  }

  private note(slot: number): void {
    if (this.isWritten[slot] === 0) {
      this.isWritten[slot] = 1;
      this.written[this.count++] = slot;
    }
  }
}
