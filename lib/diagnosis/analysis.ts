// In: one opened capture and the person's settings. Out: the types of what the analysis tells its listener while it runs.
// The same calls serve the browser's worker, the command line and the tests.

import type { Problem } from "../base/result";
import type { ByteBlock, TransactionBlock } from "../engine/bus/transactions";
import type { EdgeBlock } from "../engine/samples/edges";
import type { CaptureHead, ReadChoices } from "../engine/samples/reader";
import type { LogEntry, RosterEntry } from "../forensics/contract";
import type { Summary } from "./report";

export interface AnalysisSettings {
  readonly read: ReadChoices;
  /** Built-in profile name, or a profile object (lib/limits/profile.ts), or null for the slowest mode the measured SCL fits. */
  readonly limits: unknown;
  /** Bus capacitance for High-speed, picofarad. */
  readonly cb_pf: number | null;
  readonly roster: readonly RosterEntry[];
  readonly log: readonly LogEntry[];
}

/** Told in this order: head, then edges / transactions / progress in any mixture, then summary. Blocks handed over are the listener's to keep. */
export interface AnalysisListener {
  /** It does not keep blocks of edges, so that their memory may be used again. Absent: it does. */
  readonly passing?: boolean;
  head(head: CaptureHead): void;
  edges(block: EdgeBlock): void;
  tap(index: number, block: EdgeBlock): void;
  transactions(block: TransactionBlock, bytes: ByteBlock): void;
  progress(bytes: number): void;
}

/** attribution: per transaction, index into summary.controllers or -1. */
export type AnalysisOutcome =
  | { readonly ok: true; readonly summary: Summary; readonly attribution: Int16Array }
  | { readonly ok: false; readonly problem: Problem };
