// In: transactions and edges as they come. Out: where each transaction lies, and the levels at a tick not long past and at the end.

import { ACK, CLOSES, DIRECTIONS, type TransactionBlock } from "../engine/bus/transactions";
import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../engine/samples/edges";
import type { End } from "./rule";

/** What a sentence says of one transaction. */
export interface Told {
  readonly startTick: number;
  readonly endTick: number;
  /** 7- or 10-bit, -1 where it was not sent whole. */
  readonly address: number;
  readonly reads: boolean;
  /** Acknowledged at its address and ended by STOP or a repeated START. */
  readonly completed: boolean;
}

const READS = 1;
const COMPLETED = 2;

/** Start, end, address and how it ended of every transaction: 20 bytes each. */
export class TransactionPlaces {
  count = 0;
  private start = new Float64Array(1024);
  private end = new Float64Array(1024);
  private repeated = new Uint8Array(1024);
  private address = new Int16Array(1024);
  private manner = new Uint8Array(1024);

  add(block: TransactionBlock): void {
    for (let i = 0; i < block.length; i++) {
      if (this.count === this.start.length) this.grow();
      this.start[this.count] = block.startTick[i];
      this.end[this.count] = block.endTick[i];
      this.repeated[this.count] = block.opens[i];
      this.address[this.count] = block.address[i];
      const completed = block.addressAck[i] === ACK && CLOSES[block.closes[i]] !== "none";
      this.manner[this.count] = (DIRECTIONS[block.direction[i]] === "R" ? READS : 0) | (completed ? COMPLETED : 0);
      this.count++;
    }
  }

  /** The transaction that a tick lies in, both ends included; null where none does. */
  at(tick: number): number | null {
    let low = 0;
    let high = this.count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.start[middle] <= tick) low = middle + 1;
      else high = middle;
    }
    const i = low - 1;
    return i >= 0 && tick <= this.end[i] ? i : null;
  }

  /** The transaction whose START opens the message that this one belongs to. */
  opening(transaction: number): number {
    let i = transaction;
    while (i > 0 && this.repeated[i] === 1) i--;
    return i;
  }

  told(transaction: number): Told | null {
    if (transaction < 0 || transaction >= this.count) return null;
    const manner = this.manner[transaction];
    return {
      startTick: this.start[transaction],
      endTick: this.end[transaction],
      address: this.address[transaction],
      reads: (manner & READS) !== 0,
      completed: (manner & COMPLETED) !== 0,
    };
  }

  private grow(): void {
    const wider = (column: Float64Array) => {
      const grown = new Float64Array(column.length * 2);
      grown.set(column);
      return grown;
    };
    this.start = wider(this.start);
    this.end = wider(this.end);
    const repeated = new Uint8Array(this.repeated.length * 2);
    repeated.set(this.repeated);
    this.repeated = repeated;
    const address = new Int16Array(this.address.length * 2);
    address.set(this.address);
    this.address = address;
    const manner = new Uint8Array(this.manner.length * 2);
    manner.set(this.manner);
    this.manner = manner;
  }
}

/** Entries at the end of a block that are kept when the block itself has been handed over to somebody else. */
const TAIL = 128;

interface Stretch {
  readonly length: number;
  readonly ticks: Float64Array;
  readonly lines: Uint8Array;
}

/**
 * Looks back at the last two edge blocks, and knows since when each line has had its level. A listener may take a block's memory
 * away once it was pushed (the browser's worker transfers it), so the end of each is kept as well.
 */
export class LineWatch {
  private last: Stretch | null = null;
  private tail: Stretch | null = null;
  private tailBefore: Stretch | null = null;
  private sclSince = 0;
  private sdaSince = 0;
  private levels = SCL_UNKNOWN | SDA_UNKNOWN;

  push(block: EdgeBlock): void {
    if (block.length === 0) return;
    this.last = block;
    this.tailBefore = this.tail;
    const from = Math.max(0, block.length - TAIL);
    const { length } = block;
    this.tail = { length: length - from, ticks: block.ticks.slice(from, length), lines: block.lines.slice(from, length) };
    const scl = lastChange(block, SCL | SCL_UNKNOWN, this.levels);
    const sda = lastChange(block, SDA | SDA_UNKNOWN, this.levels);
    if (scl >= 0) this.sclSince = block.ticks[scl];
    if (sda >= 0) this.sdaSince = block.ticks[sda];
    this.levels = block.lines[block.length - 1] & ~CUT;
  }

  /** Whether SCL was high at a tick of the newest block or of the end of the one before; null where that is not known. */
  sclHighAt(tick: number): boolean | null {
    const taken = this.last?.ticks.length === 0;
    for (const stretch of [taken ? null : this.last, this.tail, this.tailBefore]) {
      if (stretch === null || stretch.ticks[0] > tick) continue;
      let low = 0;
      let high = stretch.length;
      while (low < high) {
        const middle = (low + high) >> 1;
        if (stretch.ticks[middle] <= tick) low = middle + 1;
        else high = middle;
      }
      const lines = stretch.lines[low - 1];
      return (lines & SCL_UNKNOWN) !== 0 ? null : (lines & SCL) !== 0;
    }
    return null;
  }

  atEnd(): End["lines"] {
    if ((this.levels & (SCL_UNKNOWN | SDA_UNKNOWN)) !== 0) return null;
    return {
      scl: (this.levels & SCL) === 0 ? 0 : 1,
      sda: (this.levels & SDA) === 0 ? 0 : 1,
      sclSince: this.sclSince,
      sdaSince: this.sdaSince,
    };
  }
}

// Index of the last entry that changed any of `bits`, looking back from the block's end; -1 where none did.
function lastChange(block: EdgeBlock, bits: number, before: number): number {
  const { lines } = block;
  for (let i = block.length - 1; i > 0; i--) if (((lines[i] ^ lines[i - 1]) & bits) !== 0) return i;
  return ((lines[0] ^ before) & bits) !== 0 ? 0 : -1;
}
