// In: rows, faults and what was decoded. Out: the verdict of a capture.
// fail: a limit is certainly broken, or a fault occurred that is not merely worth knowing (wording.ts says which).
// undecided: nothing failed, but something is too close to call, limits could not be judged, or nothing was decoded.
// pass: everything else. A pass that one threshold cannot prove makes its row "too close to call" and not the capture undecided:
// nearly every logic-level capture has one, and what the report counts did pass.

import type { MeasurementRow } from "../limits/rows";
import type { FaultKind, Report } from "./report";
import { FAULT_WORDS } from "./wording";

export function verdictOf(
  rows: readonly MeasurementRow[],
  faults: ReadonlyMap<FaultKind, number>,
  judged: boolean,
  transactions: number,
): Report["verdict"] {
  if (rows.some((row) => row.verdict === "fail")) return "fail";
  for (const [kind, count] of faults) if (count > 0 && FAULT_WORDS[kind].fails) return "fail";
  if (!judged || transactions === 0) return "undecided";
  return rows.some((row) => row.uncertain > 0 && !settledByFraming(row)) ? "undecided" : "pass";
}

/**
 * A hold time of 0 within the sampling is too close to call as a figure, yet the bus itself settles it: had SDA moved before SCL
 * fell, it would have been a START or a STOP, and the bytes would not frame (UM10204 3.1.3, 3.1.4).
 */
export function settledByFraming(row: { readonly limitMin: number | null; readonly min: number | null }): boolean {
  return row.limitMin === 0 && row.min !== null && row.min >= 0;
}
