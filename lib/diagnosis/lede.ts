// In: a summary. Out: two or three plain sentences: what happened, how bad, and where. Support staff may never need more.

import { duration, instant, rate } from "./format";
import type { FaultKind, Measurement, Summary } from "./report";
import { settledByFraming } from "./verdict";
import { FAULT_WORDS } from "./wording";

export function ledeOf(summary: Omit<Summary, "lede">): string[] {
  return [whatWasSeen(summary), ...whatWentWrong(summary), howItStands(summary)];
}

function plural(count: number, one: string, many = `${one}s`): string {
  return `${count.toLocaleString("en-GB")} ${count === 1 ? one : many}`;
}

function whatWasSeen({ capture, transactionCount, controllers, measurements }: Omit<Summary, "lede">): string {
  if (transactionCount === 0) return `No transaction was found in ${duration(capture.duration_s)} of this recording.`;
  const period = measurements.find((row) => /^f/.test(row.parameter))?.p50_s ?? null;
  const timed = capture.time_base !== "assumed";
  const clock = timed && period !== null ? `, clocked at about ${rate(1 / period, "Hz")}` : "";
  const span = timed ? `In ${duration(capture.duration_s)} the bus carried` : "The bus carried";
  const by = controllers.length > 1 ? ` by ${plural(controllers.length, "controller")}` : "";
  return `${span} ${plural(transactionCount, "transaction")}${by}${clock}.`;
}

function whatWentWrong(summary: Omit<Summary, "lede">): string[] {
  const parts: string[] = [];
  const [contest] = summary.contests;
  if (contest !== undefined) {
    const n = summary.contests.length;
    parts.push(
      `${plural(n, "contest")} between controllers ${n === 1 ? "was" : "were"} found; the first, in transaction ${contest.transaction}, was decided at ${instant(contest.decided_s)} (${contest.grade}).`,
    );
  }
  const worst = failingFaults(summary);
  if (worst.length > 0) {
    const named = worst
      .slice(0, 3)
      .map(([kind, count]) => `${FAULT_WORDS[kind].title.toLowerCase()} (${count.toLocaleString("en-GB")})`);
    const first = summary.faults.find((fault) => fault.kind === worst[0][0]);
    const where = first === undefined ? "" : `; the first at ${instant(first.time_s)}${inTransaction(first.transaction)}`;
    parts.push(`Faults: ${named.join(", ")}${worst.length > 3 ? " and others" : ""}${where}.`);
  }
  const [broken] = summary.violations;
  if (broken !== undefined) {
    const rows = summary.measurements.filter((row) => row.below + row.above > 0);
    const total = rows.reduce((sum, row) => sum + row.below + row.above, 0);
    const names = rows.map((row) => row.parameter).join(", ");
    const side = broken.side === "min" ? "at least" : "at most";
    parts.push(
      `${names} ${rows.length === 1 ? "breaks its limit" : "break their limits"} of ${summary.limits.profile} ${plural(total, "time")}; the worst is ${broken.parameter} ${duration(broken.measured_s)} where ${side} ${duration(broken.limit_s)} is due, at ${instant(broken.time_s)}${inTransaction(broken.transaction)}.`,
    );
  }
  return parts.slice(0, 3);
}

function inTransaction(index: number | null): string {
  return index === null ? "" : ` in transaction ${index}`;
}

/** Kinds of fault that fail a capture, the most frequent first. */
function failingFaults(summary: Omit<Summary, "lede">): [FaultKind, number][] {
  const totals = summary.fault_totals ?? {};
  return (Object.keys(FAULT_WORDS) as FaultKind[])
    .filter((kind) => FAULT_WORDS[kind].fails && (totals[kind] ?? 0) > 0)
    .map((kind): [FaultKind, number] => [kind, totals[kind] ?? 0])
    .sort((a, b) => b[1] - a[1]);
}

function howItStands(summary: Omit<Summary, "lede">): string {
  const { capture, limits, verdict, measurements } = summary;
  if (capture.time_base === "assumed") return "No time base is known, so no limit was judged: give the sample interval.";
  if (verdict === "fail") return `By ${limits.profile} this capture fails.`;
  const close = measurements.filter(
    (row) => row.verdict === "too-close" && !settledByFraming({ limitMin: row.limit_min_s, min: row.min_s }),
  );
  if (close.length > 0) return tooClose(close, limits.profile);
  if (verdict === "undecided") return "There is nothing here to judge.";
  return `Everything that could be measured is within ${limits.profile}.`;
}

function tooClose(rows: readonly Measurement[], profile: string): string {
  const needed = Math.max(0, ...rows.map((row) => row.needs_rate ?? 0));
  const names = rows.map((row) => row.parameter).join(", ");
  const faster = needed > 0 ? `; sampling at ${rate(needed, "S/s")} would tell` : "";
  return `Nothing is certainly outside ${profile}, but ${names} ${rows.length === 1 ? "is" : "are"} too close to call at this sample rate${faster}.`;
}
