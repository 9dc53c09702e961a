// In: bits in order. Out: what the inference needs of every SCL pulse and condition, in columns of 13 bytes (21 for volts):
// the low before it, the high it stands in, and when SDA moved in that low. Instants are not kept: they are the sum of the
// intervals since the START before them.

import { BIT, type BitBlock, IN_HS, LOST, OUTSIDE, REPEATED_START, START } from "../engine/bits/bits";

/** Layout of `what`: kind in the low three bits, then value, whether arbitration is over (Hs-mode), whether SDA moved more than once. */
export const KIND = 7;
export const VALUE = 8;
export const NO_ARBITRATION = 16;
export const MOVED_AGAIN = 32;

export class Ledger {
  count = 0;
  /** SCL fall to rise, ticks. NaN for START. */
  low = new Float32Array(65536);
  /** BIT: SCL rise to fall. Sr and STOP: SCL rise to the SDA change (set-up). START: NaN. */
  high = new Float32Array(65536);
  /** First SDA change after the SCL fall, ticks; NaN where SDA rested. */
  first = new Float32Array(65536);
  what = new Uint8Array(65536);
  /** Volts only: SDA over the high, SCL over the beginning of the low. */
  sdaLevel: Float32Array | null;
  sclLevel: Float32Array | null;

  transactions = 0;
  /** Per transaction: its START's entry, its instant, and how long the START held before SCL fell (NaN: never). */
  openEntry = new Uint32Array(256);
  openTick = new Float64Array(256);
  hold = new Float32Array(256);
  /** Per transaction: entry that closed it (STOP, Sr, START, LOST) or, at the end, the entry count. */
  closeEntry = new Uint32Array(256);

  /** The few entries in whose low SDA moved more than once, in order, and the last change there. */
  private restless = 0;
  private restlessEntry = new Uint32Array(256);
  private restlessLast = new Float32Array(256);

  constructor(volts: boolean) {
    this.sdaLevel = volts ? new Float32Array(65536) : null;
    this.sclLevel = volts ? new Float32Array(65536) : null;
  }

  push(block: BitBlock): void {
    this.reserve(this.count + block.length);
    const { low, high, first, what } = this;
    const { kind, value, flags, tick, fall, rise, end, sdaFirst, sdaLast, leads } = block;
    let n = this.count;
    for (let i = 0; i < block.length; i++) {
      const k = kind[i];
      const f = flags[i];
      if (k === BIT) {
        if ((f & OUTSIDE) !== 0) continue;
        low[n] = rise[i] - fall[i];
        high[n] = end[i] - rise[i];
      } else {
        low[n] = rise[i] - fall[i];
        high[n] = k === LOST ? Number.NaN : tick[i] - rise[i];
        this.condition(k, n, tick[i], end[i]);
      }
      first[n] = sdaFirst[i] - fall[i];
      what[n] = k | (value[i] * VALUE) | ((f & IN_HS) === 0 ? 0 : NO_ARBITRATION);
      // NaN where SDA rested, so the comparison is false; whether it moved is not asked here, as no branch would foresee it.
      const last = Math.fround(sdaLast[i] - fall[i]);
      if (first[n] < last) this.again(n, last);
      if (leads !== null && this.sdaLevel !== null && this.sclLevel !== null) {
        this.sdaLevel[n] = leads.sdaHigh[i];
        this.sclLevel[n] = leads.sclLow[i];
      }
      n++;
    }
    this.count = n;
  }

  /** Closes what is still open; call once after the last block. */
  finish(): void {
    const t = this.transactions - 1;
    if (t >= 0 && this.closeEntry[t] === 0) this.closeEntry[t] = this.count;
  }

  /** SCL pulses that carry bits in transaction `t`: entries `openEntry + 1` up to `closeEntry`, exclusive. */
  pulses(t: number): number {
    return this.closeEntry[t] - this.openEntry[t] - 1;
  }

  /** SCL rise of pulse `p` of transaction `t`, ticks. */
  riseTick(t: number, p: number): number {
    const base = this.openEntry[t] + 1;
    let at = this.openTick[t] + (Number.isNaN(this.hold[t]) ? 0 : this.hold[t]);
    for (let i = 0; i < p; i++) at += this.low[base + i] + this.high[base + i];
    return at + this.low[base + p];
  }

  /** Whether SDA moved exactly once in the low before the entry. */
  movedOnce(entry: number): boolean {
    return this.first[entry] >= 0 && (this.what[entry] & MOVED_AGAIN) === 0;
  }

  /** Last SDA change after the SCL fall where there were several, ticks; NaN elsewhere. */
  lastMove(entry: number): number {
    const { restlessEntry } = this;
    let low = 0;
    let high = this.restless;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (restlessEntry[middle] < entry) low = middle + 1;
      else high = middle;
    }
    return low < this.restless && restlessEntry[low] === entry ? this.restlessLast[low] : Number.NaN;
  }

  private again(entry: number, last: number): void {
    this.what[entry] |= MOVED_AGAIN;
    const n = this.restless;
    if (n === this.restlessEntry.length) {
      this.restlessEntry = grown(this.restlessEntry, new Uint32Array(2 * n));
      this.restlessLast = grown(this.restlessLast, new Float32Array(2 * n));
    }
    this.restlessEntry[n] = entry;
    this.restlessLast[n] = last;
    this.restless = n + 1;
  }

  private condition(kind: number, entry: number, tick: number, end: number): void {
    const t = this.transactions;
    if (t > 0 && this.closeEntry[t - 1] === 0) this.closeEntry[t - 1] = entry;
    if (kind !== START && kind !== REPEATED_START) return;
    if (t === this.openEntry.length) {
      this.openEntry = grown(this.openEntry, new Uint32Array(2 * t));
      this.closeEntry = grown(this.closeEntry, new Uint32Array(2 * t));
      this.openTick = grown(this.openTick, new Float64Array(2 * t));
      this.hold = grown(this.hold, new Float32Array(2 * t));
    }
    this.openEntry[t] = entry;
    this.openTick[t] = tick;
    this.hold[t] = end - tick;
    this.transactions = t + 1;
  }

  private reserve(size: number): void {
    if (size <= this.what.length) return;
    // Fresh memory costs nothing until it is written, copying does: grow in large steps.
    const room = Math.max(size, 8 * this.what.length);
    this.low = grown(this.low, new Float32Array(room));
    this.high = grown(this.high, new Float32Array(room));
    this.first = grown(this.first, new Float32Array(room));
    this.what = grown(this.what, new Uint8Array(room));
    if (this.sdaLevel !== null) this.sdaLevel = grown(this.sdaLevel, new Float32Array(room));
    if (this.sclLevel !== null) this.sclLevel = grown(this.sclLevel, new Float32Array(room));
  }
}

function grown<T extends { set(from: T): void }>(from: T, to: T): T {
  to.set(from);
  return to;
}
