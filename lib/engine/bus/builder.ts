// In: single transactions and bytes as they end. Out: the blocks handed to listeners. Grows its columns by doubling between
// two flushes, then hands out exact copies.

import type { ByteBlock, TransactionBlock } from "./transactions";

type Column = Float64Array | Uint32Array | Uint16Array | Int16Array | Uint8Array;

function grown<T extends Column>(column: T, make: (n: number) => T): T {
  const bigger = make(column.length * 2);
  bigger.set(column as never);
  return bigger;
}

const f64 = (n: number) => new Float64Array(n);
const u32 = (n: number) => new Uint32Array(n);
const u16 = (n: number) => new Uint16Array(n);
const i16 = (n: number) => new Int16Array(n);
const u8 = (n: number) => new Uint8Array(n);
const INITIAL = 256;

/** One transaction as the assembler closes it; field meanings as in TransactionBlock. */
export interface TransactionRow {
  startTick: number;
  endTick: number;
  startEdge: number;
  endEdge: number;
  opens: number;
  closes: number;
  kind: number;
  addressBytes: number;
  address: number;
  addressBits: number;
  direction: number;
  addressAck: number;
  flags: number;
  firstByte: number;
  byteCount: number;
  pulses: number;
}

export class TransactionBuilder {
  private first = 0;
  private length = 0;
  private startTick = f64(INITIAL);
  private endTick = f64(INITIAL);
  private startEdge = f64(INITIAL);
  private endEdge = f64(INITIAL);
  private opens = u8(INITIAL);
  private closes = u8(INITIAL);
  private kind = u8(INITIAL);
  private addressBytes = u8(INITIAL);
  private address = i16(INITIAL);
  private addressBits = u8(INITIAL);
  private direction = u8(INITIAL);
  private addressAck = u8(INITIAL);
  private flags = u16(INITIAL);
  private firstByte = f64(INITIAL);
  private byteCount = u32(INITIAL);
  private pulses = u32(INITIAL);

  /** Transactions waiting for the next flush. */
  get waiting(): number {
    return this.length;
  }

  push(row: TransactionRow): void {
    const i = this.length++;
    if (i === this.startTick.length) this.grow();
    this.startTick[i] = row.startTick;
    this.endTick[i] = row.endTick;
    this.startEdge[i] = row.startEdge;
    this.endEdge[i] = row.endEdge;
    this.opens[i] = row.opens;
    this.closes[i] = row.closes;
    this.kind[i] = row.kind;
    this.addressBytes[i] = row.addressBytes;
    this.address[i] = row.address;
    this.addressBits[i] = row.addressBits;
    this.direction[i] = row.direction;
    this.addressAck[i] = row.addressAck;
    this.flags[i] = row.flags;
    this.firstByte[i] = row.firstByte;
    this.byteCount[i] = row.byteCount;
    this.pulses[i] = row.pulses;
  }

  take(): TransactionBlock {
    const { first, length: n } = this;
    this.first += n;
    this.length = 0;
    return {
      first,
      length: n,
      startTick: this.startTick.slice(0, n),
      endTick: this.endTick.slice(0, n),
      startEdge: this.startEdge.slice(0, n),
      endEdge: this.endEdge.slice(0, n),
      opens: this.opens.slice(0, n),
      closes: this.closes.slice(0, n),
      kind: this.kind.slice(0, n),
      addressBytes: this.addressBytes.slice(0, n),
      address: this.address.slice(0, n),
      addressBits: this.addressBits.slice(0, n),
      direction: this.direction.slice(0, n),
      addressAck: this.addressAck.slice(0, n),
      flags: this.flags.slice(0, n),
      firstByte: this.firstByte.slice(0, n),
      byteCount: this.byteCount.slice(0, n),
      pulses: this.pulses.slice(0, n),
    };
  }

  private grow(): void {
    this.startTick = grown(this.startTick, f64);
    this.endTick = grown(this.endTick, f64);
    this.startEdge = grown(this.startEdge, f64);
    this.endEdge = grown(this.endEdge, f64);
    this.opens = grown(this.opens, u8);
    this.closes = grown(this.closes, u8);
    this.kind = grown(this.kind, u8);
    this.addressBytes = grown(this.addressBytes, u8);
    this.address = grown(this.address, i16);
    this.addressBits = grown(this.addressBits, u8);
    this.direction = grown(this.direction, u8);
    this.addressAck = grown(this.addressAck, u8);
    this.flags = grown(this.flags, u16);
    this.firstByte = grown(this.firstByte, f64);
    this.byteCount = grown(this.byteCount, u32);
    this.pulses = grown(this.pulses, u32);
  }
}

export class ByteBuilder {
  private first = 0;
  private length = 0;
  private value = u8(INITIAL);
  private ack = u8(INITIAL);
  private bits = u8(INITIAL);
  private startTick = f64(INITIAL);
  private endTick = f64(INITIAL);

  /** Index over the whole capture that the next byte will have. */
  get next(): number {
    return this.first + this.length;
  }

  push(value: number, ack: number, bits: number, startTick: number, endTick: number): void {
    const i = this.length++;
    if (i === this.value.length) this.grow();
    this.value[i] = value;
    this.ack[i] = ack;
    this.bits[i] = bits;
    this.startTick[i] = startTick;
    this.endTick[i] = endTick;
  }

  /** The bytes before index `upTo` (over the whole capture); those of a transaction still open stay. */
  take(upTo: number): ByteBlock {
    const { first } = this;
    const n = upTo - first;
    const block = {
      first,
      length: n,
      value: this.value.slice(0, n),
      ack: this.ack.slice(0, n),
      bits: this.bits.slice(0, n),
      startTick: this.startTick.slice(0, n),
      endTick: this.endTick.slice(0, n),
    };
    for (const column of [this.value, this.ack, this.bits, this.startTick, this.endTick]) column.copyWithin(0, n, this.length);
    this.first = upTo;
    this.length -= n;
    return block;
  }

  private grow(): void {
    this.value = grown(this.value, u8);
    this.ack = grown(this.ack, u8);
    this.bits = grown(this.bits, u8);
    this.startTick = grown(this.startTick, f64);
    this.endTick = grown(this.endTick, f64);
  }
}
