// In: a summary. Out: two or three plain sentences: what happened, how bad, and where. Support staff may never need more.

import type { Timebase } from "../base/time";
import type { RosterEntry } from "../forensics/contract";
import { duration, figure, hex, rate } from "./format";
import type { Told } from "./places";
import type { Contest, FaultKind, Measurement, Summary } from "./report";
import { settledByFraming } from "./verdict";
import { FAULT_WORDS } from "./wording";

/** What the sentences need beside the summary. */
export interface LedeContext {
  told(transaction: number): Told | null;
  readonly timebase: Timebase;
  readonly roster: readonly RosterEntry[];
}

type Facts = Omit<Summary, "lede">;

export function ledeOf(summary: Facts, context: LedeContext): string[] {
  const contested = contestSentences(summary, context);
  const opening = contested.length > 0 ? contested : [whatWasSeen(summary)];
  return [...opening, ...whatWentWrong(summary), howItStands(summary)];
}

function plural(count: number, one: string, many = `${one}s`): string {
  return `${count.toLocaleString("en-GB")} ${count === 1 ? one : many}`;
}

function whatWasSeen({ capture, transactionCount, controllers, measurements }: Facts): string {
  if (transactionCount === 0) return `No transaction was found in ${rounded(capture.duration_s)} of this recording.`;
  const period = measurements.find((row) => /^f/.test(row.parameter))?.p50_s ?? null;
  const timed = capture.time_base !== "assumed";
  const clock = timed && period !== null ? `, clocked at about ${rate(1 / period, "Hz")}` : "";
  const span = timed ? `In ${rounded(capture.duration_s)} the bus carried` : "The bus carried";
  const by = controllers.length > 1 ? ` by ${plural(controllers.length, "controller")}` : "";
  return `${span} ${plural(transactionCount, "transaction")}${by}${clock}.`;
}

function whatWentWrong(summary: Facts): string[] {
  const parts: string[] = [];
  const worst = failingFaults(summary);
  if (worst.length > 0) {
    const named = worst
      .slice(0, 3)
      .map(([kind, count]) => `${FAULT_WORDS[kind].title.toLowerCase()} (${count.toLocaleString("en-GB")})`);
    const first = summary.faults.find((fault) => fault.kind === worst[0][0]);
    const where = first === undefined ? "" : `; the first ${place(first.time_s, first.transaction)}`;
    parts.push(`Faults: ${named.join(", ")}${worst.length > 3 ? " and others" : ""}${where}.`);
  }
  const [broken] = summary.violations;
  if (broken !== undefined) {
    const rows = summary.measurements.filter((row) => row.below + row.above > 0);
    const total = rows.reduce((sum, row) => sum + row.below + row.above, 0);
    const names = rows.map((row) => row.parameter).join(", ");
    const side = broken.side === "min" ? "at least" : "at most";
    parts.push(
      `${names} ${rows.length === 1 ? "breaks its limit" : "break their limits"} of ${summary.limits.profile} ${plural(total, "time")}; the worst is ${broken.parameter} ${figure(broken.measured_s, [broken.limit_s])} where ${side} ${duration(broken.limit_s)} is due, ${place(broken.time_s, broken.transaction)}.`,
    );
  }
  return parts;
}

/** A transaction is found by its number; only what lies in none needs the time, to the microsecond. */
function place(time: number, transaction: number | null): string {
  return transaction === null ? `at ${Number(time.toFixed(6))} s` : `in transaction ${transaction}`;
}

const SURENESS: Record<Contest["grade"], string> = {
  certain: "was contested",
  strong: "was contested",
  probable: "was probably contested",
  weak: "may have been contested",
};

/** The contest a reader should see first: the surest one, of those the earliest. */
function foremost(contests: readonly Contest[]): Contest | undefined {
  return contests.reduce<Contest | undefined>(
    (best, one) => (best && best.probability >= one.probability ? best : one),
    undefined,
  );
}

function contestSentences(summary: Facts, context: LedeContext): string[] {
  const contest = foremost(summary.contests);
  if (contest === undefined) return [];
  const name = (id: string | null, otherwise: string) => {
    const row = summary.controllers.find((controller) => controller.id === id);
    return row ? (row.name ?? `controller ${row.id}`) : otherwise;
  };
  const kept = name(contest.kept, "one controller");
  const yielded = name(contest.yielded, "another");
  const told = context.told(contest.transaction);
  // In the address byte the two need not have meant the same device.
  const aim = told === null || told.address < 0 ? "" : target(told, context);
  const meant = contest.byte === 0 ? "both started" : `both addressed ${aim || "the same device"}`;
  const sentences = [
    `Transaction ${contest.transaction} ${SURENESS[contest.grade]}: ${kept} and ${yielded} ${meant}; at bit ${contest.bit_index} ${yielded} sent a high, the bus stayed low, and ${yielded} left${contest.byte === 0 && aim ? `, while ${kept} went on to ${aim}` : ""}.`,
    retrySentence(contest, told, context),
  ];
  const n = summary.contests.length;
  if (n > 1) sentences.push(`There are ${n.toLocaleString("en-GB")} contests in all.`);
  return sentences;
}

function target({ address, reads }: Told, { roster }: LedeContext): string {
  const device = roster.find((row) => row.role === "target" && row.address === address);
  const at = device ? `${device.name} at ${hex(address)}` : hex(address);
  return `${at} for ${reads ? "reading" : "writing"}`;
}

function retrySentence(contest: Contest, told: Told | null, { told: tell, timebase }: LedeContext): string {
  const retry = contest.retry === null ? null : tell(contest.retry);
  if (contest.retry === null || retry === null) return "No retry of it was found in this record.";
  const pause = told === null ? 0 : (retry.startTick - told.endTick) / timebase.ticksPerSecond;
  const after = timebase.origin === "assumed" || pause <= 0 ? "followed" : `followed ${rounded(pause)} after STOP`;
  return retry.completed
    ? `Its retry, transaction ${contest.retry}, ${after} and completed, so nothing was lost.`
    : `Its retry, transaction ${contest.retry}, ${after} and did not complete.`;
}

/** Three significant digits: a sentence is not the place for more. */
function rounded(time: number): string {
  return duration(Number(time.toPrecision(3)));
}

/** Kinds of fault that fail a capture, the most frequent first. */
function failingFaults(summary: Facts): [FaultKind, number][] {
  const totals = summary.fault_totals ?? {};
  return (Object.keys(FAULT_WORDS) as FaultKind[])
    .filter((kind) => FAULT_WORDS[kind].fails && (totals[kind] ?? 0) > 0)
    .map((kind): [FaultKind, number] => [kind, totals[kind] ?? 0])
    .sort((a, b) => b[1] - a[1]);
}

function howItStands(summary: Facts): string {
  const { capture, limits, verdict, measurements } = summary;
  if (capture.time_base === "assumed") return "No time base is known, so no limit was judged: give the sample interval.";
  if (verdict === "fail") return `By ${limits.profile} this capture fails.`;
  const open = measurements.filter(
    (row) => row.verdict === "too-close" && !settledByFraming({ limitMin: row.limit_min_s, min: row.min_s }),
  );
  const close = open.filter((row) => row.uncertain > 0);
  if (close.length > 0) return tooClose(close, limits.profile);
  if (verdict === "undecided") return "There is nothing here to judge.";
  const within = `Everything that could be measured is within ${limits.profile}`;
  if (open.length === 0) return `${within}.`;
  const names = open.map((row) => row.parameter).join(", ");
  return `${within}; for ${names} levels alone are no proof, as slow edges could hide a shorter interval: record volts to be sure.`;
}

function tooClose(rows: readonly Measurement[], profile: string): string {
  const needed = Math.max(0, ...rows.map((row) => row.needs_rate ?? 0));
  const names = rows.map((row) => row.parameter).join(", ");
  const faster = needed > 0 ? `; sampling at ${rate(needed, "S/s")} would tell` : "";
  return `Nothing is certainly outside ${profile}, but ${names} ${rows.length === 1 ? "is" : "are"} too close to call at this sample rate${faster}.`;
}
