// In: rows, faults and what was decoded. Out: the verdict of a capture.
// fail: a limit is certainly broken, or a fault occurred that is not merely worth knowing (wording.ts says which).
// undecided: nothing failed, but something is too close to call, limits could not be judged, or nothing was decoded.
// pass: everything else.

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
  return rows.some((row) => row.verdict === "too-close") ? "undecided" : "pass";
}
