// In: transactions, bytes, per-transaction clock and data habits. Out: who drove what, and which transactions were contested.
// This file holds the types both sides of the stair agree on; nothing here computes.

import type { BlindPair, Contest, ControllerRow, Fault, PlacedLog, Stretch, TargetContest } from "../diagnosis/report";
import type { BitBlock } from "../engine/bits/bits";
import type { ByteBlock, TransactionBlock } from "../engine/bus/transactions";
import type { EdgeBlock } from "../engine/samples/edges";
import type { CaptureHead, TapChoice } from "../engine/samples/reader";

/** One line of a controller log. `time_s` is on the log's own clock. */
export interface LogEntry {
  readonly time_s: number;
  readonly controller: string | null;
  readonly message: string;
}

/** A device or controller on the bus. `address` is 7-bit. */
export interface RosterEntry {
  readonly role: "controller" | "target";
  readonly address: number | null;
  readonly name: string;
  readonly tlow_s: number | null;
  readonly thigh_s: number | null;
  readonly vol_v: number | null;
  /** How long this device may hold SCL low, seconds. */
  readonly stretch_allow_s: number | null;
  readonly registers: string;
}

export interface ForensicsOptions {
  readonly roster: readonly RosterEntry[];
  readonly log: readonly LogEntry[];
}

export interface ForensicsOutcome {
  readonly contests: readonly Contest[];
  readonly controllers: readonly ControllerRow[];
  /** Per transaction: index into `controllers`, or -1 where it cannot be told. */
  readonly attribution: Int16Array;
  readonly stretches: readonly Stretch[];
  /** Faults of kind "look-alike". */
  readonly lookAlikes: readonly Fault[];
  /** Pairs whose contests would leave no trace on these lines. */
  readonly blindPairs: readonly BlindPair[];
  /** Contests between targets that answered one read. */
  readonly targetContests: readonly TargetContest[];
  /** The controller log on the capture's clock; null where none was given. */
  readonly log: PlacedLog | null;
}

/** Streaming: sees every landing as it is made, then concludes once. */
export interface Forensics {
  /** Bits in order, each block exactly once; blocks are reused by the caller afterwards. */
  bits(block: BitBlock): void;
  /** Transactions and their bytes in order. A transaction comes after the bits that close it. */
  transactions(block: TransactionBlock, bytes: ByteBlock): void;
  /** Edges of one tap, in order. */
  tap(index: number, block: EdgeBlock): void;
  conclude(endTick: number): ForensicsOutcome;
}

/** Shape of lib/forensics/forensics.ts `createForensics`. */
export type CreateForensics = (head: CaptureHead, taps: readonly TapChoice[], options: ForensicsOptions) => Forensics;
