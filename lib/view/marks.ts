// In: the summary of an analysis. Out: what stands on which transaction, and the ordered lists that the keyboard walks:
// faults and contests. Built once when the summary arrives.

import type { Contest, Fault, Stretch, Summary, Violation } from "../diagnosis/report";
import { FAULT_WORDS } from "../diagnosis/wording";

/** What is known about one transaction beyond its own bits. */
export interface RowMarks {
  readonly contest: Contest | null;
  /** Index of the transaction whose retry this is, or null. */
  readonly retryOf: number | null;
  readonly stretches: readonly Stretch[];
  readonly faults: readonly Fault[];
  readonly violations: readonly Violation[];
}

export const NO_MARKS: RowMarks = { contest: null, retryOf: null, stretches: [], faults: [], violations: [] };

interface Growing {
  contest: Contest | null;
  retryOf: number | null;
  stretches: Stretch[];
  faults: Fault[];
  violations: Violation[];
}

export interface Marks {
  readonly of: (transaction: number) => RowMarks;
  /** Transactions, ascending, each once. */
  readonly contested: readonly number[];
  /** With a fault that fails the capture, or outside a limit. Remarks (a spike that was filtered out, say) are not among them. */
  readonly faulty: readonly number[];
  readonly stretched: readonly number[];
  readonly unanswered: readonly number[];
  readonly outside: readonly number[];
  /** Whether a transaction without a violation is known to be within limits: limits were judged and none was left off the list. */
  readonly complete: boolean;
  readonly judged: boolean;
}

function ascending(set: Set<number>): number[] {
  return [...set].sort((a, b) => a - b);
}

export function marksOf(summary: Summary | null): Marks {
  const rows = new Map<number, Growing>();
  const at = (transaction: number) => {
    const known = rows.get(transaction);
    if (known) return known;
    const made: Growing = { contest: null, retryOf: null, stretches: [], faults: [], violations: [] };
    rows.set(transaction, made);
    return made;
  };
  const contested = new Set<number>();
  const faulty = new Set<number>();
  const stretched = new Set<number>();
  const unanswered = new Set<number>();
  const outside = new Set<number>();
  for (const contest of summary?.contests ?? []) {
    at(contest.transaction).contest = contest;
    contested.add(contest.transaction);
    if (contest.retry !== null) at(contest.retry).retryOf = contest.transaction;
  }
  for (const stretch of summary?.stretches ?? []) {
    at(stretch.transaction).stretches.push(stretch);
    stretched.add(stretch.transaction);
  }
  for (const fault of summary?.faults ?? []) {
    if (fault.transaction === null) continue;
    at(fault.transaction).faults.push(fault);
    if (FAULT_WORDS[fault.kind].fails) faulty.add(fault.transaction);
    if (fault.kind === "address-nack") unanswered.add(fault.transaction);
  }
  for (const violation of summary?.violations ?? []) {
    if (violation.transaction === null) continue;
    at(violation.transaction).violations.push(violation);
    outside.add(violation.transaction);
    faulty.add(violation.transaction);
  }
  const counted = (summary?.measurements ?? []).reduce((total, row) => total + row.below + row.above, 0);
  const judged = summary !== null && summary.capture.time_base !== "assumed";
  return {
    of: (transaction) => rows.get(transaction) ?? NO_MARKS,
    contested: ascending(contested),
    faulty: ascending(faulty),
    stretched: ascending(stretched),
    unanswered: ascending(unanswered),
    outside: ascending(outside),
    complete: judged && counted <= (summary?.violations.length ?? 0),
    judged,
  };
}

/** The next entry of an ascending list after `from`, or before it with step -1; null at the end. */
export function neighbour(list: ArrayLike<number>, from: number, step: 1 | -1): number | null {
  let low = 0;
  let high = list.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (step === 1 ? list[middle] <= from : list[middle] < from) low = middle + 1;
    else high = middle;
  }
  const at = step === 1 ? low : low - 1;
  return at >= 0 && at < list.length ? list[at] : null;
}
