// In: nothing. Out: what a fault rule is, and what it is shown. One rule per file in rules/; see DEVELOPERS.md for how to add one.

import type { Timebase } from "../base/time";
import type { ByteBlock } from "../engine/bus/transactions";
import type { Remnant } from "../engine/decoder";
import type { CaptureHead, CaptureTail } from "../engine/samples/reader";
import type { Profile } from "../limits/profile";
import type { MeasurementRow } from "../limits/rows";
import type { Moment } from "./moments";
import type { Fault, FaultKind, HarmlessKind, Stretch } from "./report";

/** One transaction as a rule sees it. The same object is filled again for each transaction: keep numbers, not the row. */
export interface Row {
  index: number;
  startTick: number;
  endTick: number;
  /** Indices into OPENS, CLOSES, KINDS, DIRECTIONS of transactions.ts. */
  opens: number;
  closes: number;
  kind: number;
  addressBytes: number;
  address: number;
  addressBits: number;
  direction: number;
  addressAck: number;
  flags: number;
  pulses: number;
  byteCount: number;
  /** Its bytes stand in `bytes` from `at` on. */
  at: number;
  bytes: ByteBlock;
  /** What the bits of this transaction showed that its bytes do not. */
  moments: readonly Moment[];
}

/** What is known when the record has ended. */
export interface End {
  readonly head: CaptureHead;
  readonly tail: CaptureTail;
  /** Levels at the end, or null where a line is unknown, and since when each line has had its level. */
  readonly lines: { readonly scl: 0 | 1; readonly sda: 0 | 1; readonly sclSince: number; readonly sdaSince: number } | null;
  /** Usual time from SCL fall to SCL fall, ticks; NaN where no clock was seen. */
  readonly period: number;
  readonly rows: readonly MeasurementRow[];
  readonly profile: Profile | null;
  /** Moments that lie in no transaction. */
  readonly outside: readonly Moment[];
  /** Volts: SCL pulses of the byte before a time in which SCL is low throughout, -1 outside a byte; null where it is not. */
  lowSlot(tick: number, width: number): number | null;
  readonly lookAlikes: readonly Fault[];
  readonly stretches: readonly Stretch[];
  /** Last transaction, and pulses seen in it; -1 where there was none. */
  readonly lastTransaction: number;
  readonly lastPulses: number;
  readonly lastCloses: number;
}

export interface Findings {
  readonly base: Timebase;
  /** `transaction`: undefined is found by time when the record has ended; null belongs to none. */
  add(kind: FaultKind, tick: number, detail: string, transaction?: number | null): void;
  /** The same for what is no fault and is worth naming. */
  harmless(kind: HarmlessKind, tick: number, transaction?: number | null): void;
}

/** A rule at work on one capture. */
export interface Watch {
  transaction?(row: Row): void;
  /** `slot`: SCL pulses of its byte before it, 0 to 8; -1 where no transaction is open. */
  spike?(tick: number, width: number, line: "scl" | "sda", sclHigh: boolean | null, slot: number): void;
  remnant?(remnant: Remnant): void;
  conclude?(end: End): void;
}

export interface Rule {
  readonly meta: {
    readonly kind: FaultKind;
    /** Clause that the rule rests on, or where it is common practice. */
    readonly clause: string;
  };
  watch(findings: Findings): Watch;
}
