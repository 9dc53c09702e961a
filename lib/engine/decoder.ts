// In: edges, block by block. Out: bits, then transactions and bytes, block by block. The one entry to decoding: spike
// filter, conditions and bits, bus assembly, in that order.

import type { BitBlock, Spike } from "./bits/bits";
import type { ByteBlock, TransactionBlock } from "./bus/transactions";
import type { EdgeBlock } from "./samples/edges";
import type { CaptureHead } from "./samples/reader";

export interface DecodeListener {
  /** Bits in order. The block is reused after the call returns. */
  bits(block: BitBlock): void;
  /** Transactions in order with exactly their bytes; after the bits that closed them. Fresh arrays, the listener's to keep. */
  transactions(block: TransactionBlock, bytes: ByteBlock): void;
  /** A pulse shorter than tSP that was taken out. */
  spike(spike: Spike): void;
  /** Clocks of a transaction whose START lies before the record or before a cut. At most one per uncut stretch of record. */
  remnant(remnant: Remnant): void;
}

/** What is left of a transaction that began before the record (or a cut) did; its bits cannot be framed into bytes. */
export interface Remnant {
  readonly startTick: number;
  readonly endTick: number;
  readonly pulses: number;
  readonly closes: "P" | "Sr" | "none";
}

export interface Decoder {
  push(block: EdgeBlock): void;
  /** Ends the record at `endTick`: what is open is closed with "none". */
  finish(endTick: number): void;
}

export type DecodeHead = Pick<CaptureHead, "timebase" | "levels" | "sampleTicks">;

export type CreateDecoder = (head: DecodeHead, listener: DecodeListener) => Decoder;
