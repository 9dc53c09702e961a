// In: transaction and byte blocks as the worker hands them over, kept and never copied. Out: one transaction as a plain
// object for the few rows that are drawn, and columns for the passes that read all of them.

import { ACK, type ByteBlock, DIRECTIONS, KINDS, NACK, type TransactionBlock } from "../engine/bus/transactions";
import { BlockIndex } from "./columns";

export interface RowByte {
  readonly value: number;
  /** true ACK, false NACK, null where the ninth bit is missing. */
  readonly ack: boolean | null;
  readonly bits: number;
  readonly startTick: number;
  readonly endTick: number;
}

export interface Row {
  readonly index: number;
  readonly startTick: number;
  readonly endTick: number;
  readonly startEdge: number;
  readonly endEdge: number;
  readonly opens: "S" | "Sr";
  readonly closes: "P" | "Sr" | "none";
  readonly kind: (typeof KINDS)[number];
  /** -1 where never sent. */
  readonly address: number;
  readonly addressBits: number;
  readonly direction: "W" | "R" | null;
  readonly flags: number;
  readonly addressBytes: number;
  readonly firstByte: number;
  readonly byteCount: number;
  readonly pulses: number;
}

/** An address as it was seen on the bus, and how often. */
export interface SeenAddress {
  readonly address: number;
  readonly bits: number;
  readonly count: number;
}

const CLOSE_WORDS = ["P", "Sr", "none"] as const;

export class Ledger {
  readonly #rows = new BlockIndex();
  readonly #blocks: TransactionBlock[] = [];
  readonly #byteIndex = new BlockIndex();
  readonly #bytes: ByteBlock[] = [];
  readonly #addresses = new Map<number, { bits: number; count: number }>();
  #longest = 0;

  get length(): number {
    return this.#rows.total;
  }

  get byteCount(): number {
    return this.#byteIndex.total;
  }

  get blocks(): readonly TransactionBlock[] {
    return this.#blocks;
  }

  /** Ticks of the longest transaction; 0 in an empty ledger. */
  get longest(): number {
    return this.#longest;
  }

  /** Every address seen, ascending. */
  get addresses(): SeenAddress[] {
    return [...this.#addresses].map(([address, seen]) => ({ address, ...seen })).sort((a, b) => a.address - b.address);
  }

  append(block: TransactionBlock, bytes: ByteBlock): void {
    if (bytes.length > 0) {
      this.#byteIndex.append(bytes.length);
      this.#bytes.push(bytes);
    }
    if (block.length > 0) {
      this.#rows.append(block.length);
      this.#blocks.push(block);
      this.#take(block);
    }
  }

  /** What the page asks of the whole ledger is kept as it grows: a walk over a million rows would hold a frame up. */
  #take(block: TransactionBlock): void {
    for (let k = 0; k < block.length; k++) {
      this.#longest = Math.max(this.#longest, block.endTick[k] - block.startTick[k]);
      const address = block.address[k];
      if (address < 0) continue;
      const seen = this.#addresses.get(address);
      if (seen) seen.count++;
      else this.#addresses.set(address, { bits: block.addressBits[k], count: 1 });
    }
  }

  row(index: number): Row {
    const number = this.#rows.block(index);
    const block = this.#blocks[number];
    const k = index - this.#rows.start(number);
    return {
      index,
      startTick: block.startTick[k],
      endTick: block.endTick[k],
      startEdge: block.startEdge[k],
      endEdge: block.endEdge[k],
      opens: block.opens[k] === 0 ? "S" : "Sr",
      closes: CLOSE_WORDS[block.closes[k]],
      kind: KINDS[block.kind[k]],
      address: block.address[k],
      addressBits: block.addressBits[k],
      direction: DIRECTIONS[block.direction[k]],
      flags: block.flags[k],
      addressBytes: block.addressBytes[k],
      firstByte: block.firstByte[k],
      byteCount: block.byteCount[k],
      pulses: block.pulses[k],
    };
  }

  startTick(index: number): number {
    const number = this.#rows.block(index);
    return this.#blocks[number].startTick[index - this.#rows.start(number)];
  }

  endTick(index: number): number {
    const number = this.#rows.block(index);
    return this.#blocks[number].endTick[index - this.#rows.start(number)];
  }

  byte(index: number): RowByte {
    const number = this.#byteIndex.block(index);
    const block = this.#bytes[number];
    const k = index - this.#byteIndex.start(number);
    const ack = block.ack[k];
    return {
      value: block.value[k],
      ack: ack === ACK ? true : ack === NACK ? false : null,
      bits: block.bits[k],
      startTick: block.startTick[k],
      endTick: block.endTick[k],
    };
  }

  /** At most `most` bytes of a row, in order, address bytes first. */
  bytes(row: Row, most = Number.POSITIVE_INFINITY): RowByte[] {
    const list: RowByte[] = [];
    for (let k = 0; k < Math.min(row.byteCount, most); k++) list.push(this.byte(row.firstByte + k));
    return list;
  }

  /** Value of a byte counted over the whole capture. */
  value(index: number): number {
    const number = this.#byteIndex.block(index);
    return this.#bytes[number].value[index - this.#byteIndex.start(number)];
  }

  /** First transaction that starts after `tick`, 0 to length. */
  after(tick: number): number {
    let low = 0;
    let high = this.length;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (this.startTick(middle) <= tick) low = middle + 1;
      else high = middle;
    }
    return low;
  }
}
