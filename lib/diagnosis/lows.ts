// In: bits of a capture in volts. Out: whether SCL was low at a time, and where in a byte. Excursions are told only when the record
// has ended, so the lows are kept; so many of them that memory stays bounded, and beyond that nothing is known.

import { BIT, type BitBlock, LOST, OUTSIDE, STOP } from "../engine/bits/bits";

/** 17 bytes each. */
const KEPT = 1 << 20;

export class LowSpans {
  private count = 0;
  private from = new Float64Array(1024);
  private to = new Float64Array(1024);
  private slots = new Int8Array(1024);
  private pulse = -1;

  bits(block: BitBlock): void {
    const { kind, flags, fall, rise, length } = block;
    for (let i = 0; i < length; i++) {
      const k = kind[i];
      // A START's low begins with it, and is the one before its first bit.
      if (!Number.isNaN(fall[i]) && !Number.isNaN(rise[i])) this.add(fall[i], rise[i], this.pulse > 0 ? this.pulse % 9 : -1);
      if (k === LOST || k === STOP) this.pulse = -1;
      else if (k !== BIT) this.pulse = 0;
      else if (this.pulse >= 0 && (flags[i] & OUTSIDE) === 0) this.pulse++;
    }
  }

  private add(from: number, to: number, slot: number): void {
    if (this.count === KEPT) return;
    if (this.count === this.from.length) this.grow();
    this.from[this.count] = from;
    this.to[this.count] = to;
    this.slots[this.count++] = slot;
  }

  /** SCL pulses of the byte before the low that holds all of this time, -1 outside a byte; null where SCL was not low throughout. */
  slotOf(tick: number, width: number): number | null {
    let low = 0;
    let high = this.count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.from[middle] <= tick) low = middle + 1;
      else high = middle;
    }
    return low > 0 && tick + width <= this.to[low - 1] ? this.slots[low - 1] : null;
  }

  private grow(): void {
    const wider = (column: Float64Array) => {
      const grown = new Float64Array(column.length * 2);
      grown.set(column);
      return grown;
    };
    this.from = wider(this.from);
    this.to = wider(this.to);
    const slots = new Int8Array(this.slots.length * 2);
    slots.set(this.slots);
    this.slots = slots;
  }
}
