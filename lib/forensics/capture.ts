// In: nothing of its own. Out: what every step after the ledger shares about one capture, and how places and names are written.

import type { Timebase } from "../base/time";
import type { Contest } from "../diagnosis/report";
import type { Census } from "./census";
import type { LogEntry, RosterEntry } from "./contract";
import type { Naming } from "./evidence";
import type { Ledger } from "./ledger";
import type { Messages } from "./message";
import type { Sampling } from "./signature";

export interface Capture {
  readonly ledger: Ledger;
  readonly messages: Messages;
  /** Per transaction. */
  readonly endTick: Float64Array;
  readonly address: Int16Array;
  readonly sampling: Sampling;
  readonly timebase: Timebase;
  readonly vdd: number | null;
  readonly roster: readonly RosterEntry[];
  readonly log: readonly LogEntry[];
}

/** Where a contest stands, as the report writes it. */
export function placed(
  capture: Capture,
  t: number,
  pulse: number,
): Pick<Contest, "transaction" | "start_s" | "decided_s" | "byte" | "bit" | "bit_index"> {
  const perSecond = capture.timebase.ticksPerSecond;
  return {
    transaction: t,
    start_s: capture.ledger.openTick[t] / perSecond,
    decided_s: capture.ledger.riseTick(t, pulse) / perSecond,
    byte: Math.floor(pulse / 9),
    bit: pulse % 9,
    bit_index: pulse,
  };
}

/** Rank of each controller by its first message; C1 is the first seen. */
export function ranks(census: Census): Int16Array {
  const index = new Int16Array(census.signatures.length).fill(-1);
  let next = 0;
  for (const c of census.by) if (c >= 0 && index[c] < 0) index[c] = next++;
  for (let c = 0; c < index.length; c++) if (index[c] < 0) index[c] = next++;
  return index;
}

export function namingOf(capture: Capture, census: Census): Naming {
  const index = ranks(census);
  const perMicrosecond = capture.timebase.ticksPerSecond / 1e6;
  return {
    id: (c) => `C${index[c] + 1}`,
    microseconds: (ticks) => (Number.isNaN(ticks) ? "unknown" : `${(ticks / perMicrosecond).toFixed(3)} us`),
  };
}
