// In: a summary and the transactions one by one. Out: the report for reading, line by line.

import { capacitance, duration, figure, hex, instant, rate, resistance } from "./format";
import { HARMLESS_WORDS } from "./harmless";
import type { Measurement, Summary } from "./report";
import type { ReportTransaction } from "./transaction";
import { FAULT_WORDS } from "./wording";

/** Lines of a list that are printed before "and n more"; the JSON report has them all. */
const SHOWN = 40;

export function* reportText(name: string, summary: Summary, transactions: Iterable<ReportTransaction>): Generator<string> {
  yield `${name}\n`;
  for (const sentence of summary.lede ?? []) yield `${sentence}\n`;
  yield* captureLines(summary);
  yield* transactionLines(summary, transactions);
  yield* measurementLines(summary);
  yield* levelLines(summary);
  yield* listed("Faults", summary.faults, (fault) => {
    const where = fault.transaction === null ? "" : `  #${fault.transaction}`;
    return `  ${instant(fault.time_s).padEnd(18)}${where.padEnd(9)} ${FAULT_WORDS[fault.kind].title}: ${fault.detail}`;
  });
  const kinds = [...new Set(summary.faults.map((fault) => fault.kind))];
  if (kinds.length > 0) yield "\nWhat to do\n";
  for (const kind of kinds) yield `  ${FAULT_WORDS[kind].title}: ${FAULT_WORDS[kind].meaning} ${FAULT_WORDS[kind].advice}\n`;
  yield* harmlessLines(summary);
  yield* listed("Contests", summary.contests, (contest) => {
    const { kept, yielded } = contest;
    const parties = kept === null && yielded === null ? "" : `; ${kept ?? "?"} kept the bus, ${yielded ?? "?"} yielded`;
    const evidence = contest.evidence.map((one) => `${one.kind} ${one.bits.toFixed(1)}`).join(", ");
    return `  #${contest.transaction} decided at ${instant(contest.decided_s)}, byte ${contest.byte} bit ${contest.bit}${parties}; probability ${contest.probability.toFixed(2)} (${contest.grade}); ${evidence}`;
  });
  for (const { kept, yielded } of summary.blind_pairs ?? [])
    yield `  Had ${yielded} yielded to ${kept}, nothing on these lines could show it: together they look like ${kept} alone.\n`;
  if ((summary.target_contests ?? []).length > 0)
    yield* listed("Between targets", summary.target_contests ?? [], (contest) => {
      return `  #${contest.transaction} byte ${contest.byte} bit ${contest.bit}; probability ${contest.probability.toFixed(2)} (${contest.grade}); ${contest.detail}`;
    });
  yield* listed("Clock stretching", summary.stretches, (stretch) => {
    return `  #${stretch.transaction} byte ${stretch.byte} bit ${stretch.bit}: SCL low for ${duration(stretch.low_s)}, ${duration(stretch.excess_s)} more than usual, by ${stretch.by}${stretch.runt_s === undefined ? "" : `; the first high after it is a runt of ${duration(stretch.runt_s)}`}`;
  });
  yield `\nVerdict: ${summary.verdict} (${summary.limits.profile}${summary.limits.source === "" ? "" : `, ${summary.limits.source}`})\n`;
}

function* levelLines({ levels, controllers }: Summary): Generator<string> {
  if (!levels) return;
  yield "\nLevels\n";
  for (const [name, level] of [
    ["SCL low", levels.scl_low],
    ["SDA low", levels.sda_low],
    ["SDA high", levels.sda_high],
  ] as const) {
    if (level !== null)
      yield `  ${name}: ${level.min_v.toFixed(3)} V to ${level.max_v.toFixed(3)} V, median ${level.p50_v.toFixed(3)} V, of ${level.count}\n`;
  }
  const plateaus = levels.sda_plateaus ?? [];
  if (plateaus.length > 1) {
    const each = plateaus.map(({ v, count }) => `${v.toFixed(3)} V (${count})`);
    yield `  SDA low stands at ${each.join(", ")}: as many drivers, or groups of drivers, can be told apart\n`;
  }
  for (const { id, name, vol_v } of controllers) if (vol_v !== null) yield `  ${name ?? id} pulls to ${vol_v.toFixed(3)} V\n`;
  if (levels.rc_s !== null) yield `  RC of the lines ${duration(levels.rc_s)}, from the median rise\n`;
  if (levels.rp_min_ohm === null) return;
  yield `  Rp(min) ${resistance(levels.rp_min_ohm)}`;
  if (levels.rc_max_s === null) yield "\n";
  else {
    const at = (farad: number) => `${resistance((levels.rc_max_s ?? 0) / farad)} at ${capacitance(farad)}`;
    yield `; Rp(max) ${[100e-12, 200e-12, 400e-12].map(at).join(", ")}; the data sheets of the devices decide\n`;
  }
}

/** Places of each harmless thing that are printed. */
const PLACES = 5;

function* harmlessLines({ harmless = [] }: Summary): Generator<string> {
  if (harmless.length === 0) return;
  yield "\nHarmless, and no fault\n";
  for (const { kind, count, places } of harmless) {
    const at = places
      .slice(0, PLACES)
      .map((place) => (place.transaction === null ? instant(place.time_s) : `#${place.transaction}`));
    yield `  ${HARMLESS_WORDS[kind].title}: ${count}, ${count > at.length ? "first " : ""}in ${at.join(", ")}. ${HARMLESS_WORDS[kind].meaning}\n`;
  }
}

function* captureLines({ capture }: Summary): Generator<string> {
  const interval = capture.sample_interval_s === null ? "change times" : `${duration(capture.sample_interval_s)} between samples`;
  yield `\n${capture.format.toUpperCase()}, ${capture.levels}, SCL ${capture.scl}, SDA ${capture.sda}, ${duration(capture.duration_s)}, ${interval}\n`;
  if (capture.vdd_v !== null) {
    yield `VDD ${capture.vdd_v.toFixed(2)} V, thresholds ${capture.vil_v?.toFixed(2)} V and ${capture.vih_v?.toFixed(2)} V\n`;
  }
  for (const warning of capture.warnings) {
    yield `Note${warning.line === undefined ? "" : ` (line ${warning.line})`}: ${warning.message}\n`;
  }
}

function* transactionLines(summary: Summary, transactions: Iterable<ReportTransaction>): Generator<string> {
  if (summary.transactionCount > 0) yield "\nTransactions\n";
  let shown = 0;
  for (const transaction of transactions) {
    if (shown++ === SHOWN) break;
    yield `  #${String(transaction.index).padEnd(6)} ${instant(transaction.start_s).padEnd(18)} ${scoreOf(transaction)}\n`;
  }
  if (summary.transactionCount > SHOWN) yield `  and ${summary.transactionCount - SHOWN} more: see --json\n`;
}

/** The score of a transaction: S 0x50 W A 01 A 02 N P. */
export function scoreOf(transaction: ReportTransaction): string {
  const { address, direction, address_ack, bytes } = transaction;
  const mark = (ack: boolean | null) => (ack === null ? "?" : ack ? "A" : "N");
  const to = address === null ? "" : ` ${hex(address)}${direction === null ? "" : ` ${direction}`} ${mark(address_ack)}`;
  const data = bytes.map(
    (byte) =>
      ` ${byte.bits < 8 ? `(${byte.bits} bits)` : byte.value.toString(16).toUpperCase().padStart(2, "0")} ${mark(byte.ack)}`,
  );
  const kind = transaction.kind === "normal" ? "" : `  ${transaction.kind}`;
  const by = transaction.controller === null ? "" : `  by ${transaction.controller}`;
  return `${transaction.opens}${to}${data.join("")} ${transaction.closes === "none" ? "..." : transaction.closes}${kind}${by}`;
}

function* measurementLines(summary: Summary): Generator<string> {
  if (summary.measurements.length === 0) return;
  yield `\nMeasurements against ${summary.limits.profile}\n`;
  const head = ["", "count", "least", "median", "greatest", "limit", "", "clause"];
  const rows = summary.measurements.map(cellsOf);
  const widths = head.map((cell, c) => Math.max(cell.length, ...rows.map((row) => row[c].length)));
  for (const row of [head, ...rows])
    yield `  ${row
      .map((cell, c) => cell.padEnd(widths[c]))
      .join("  ")
      .trimEnd()}\n`;
  const open = summary.measurements.filter((row) => (row.unproven ?? 0) > 0);
  if (open.length > 0) {
    const least = open.map((row) => `${row.parameter} ${duration(row.bias_s ?? 0)}`).join(", ");
    yield `  One threshold: a pass nearer to its least value than slow edges may hide is no proof (${least}); a fail stands.\n`;
  }
  for (const row of summary.measurements) {
    if (row.needs_rate === null || row.needs_rate === undefined) continue;
    yield `  ${row.parameter}: a value near this limit cannot be judged at this sample rate; ${rate(row.needs_rate, "S/s")} would do.\n`;
  }
}

function cellsOf(row: Measurement): string[] {
  const time = (seconds: number | null) => (seconds === null ? "-" : figure(seconds, [row.limit_min_s, row.limit_max_s]));
  const limits = [
    row.limit_min_s === null ? "" : `>= ${duration(row.limit_min_s)}`,
    row.limit_max_s === null ? "" : `<= ${duration(row.limit_max_s)}`,
  ].filter((part) => part !== "");
  return [
    row.traffic === "Hs" ? `${row.parameter} (Hs)` : row.parameter,
    String(row.count),
    time(row.min_s),
    time(row.p50_s),
    time(row.max_s),
    limits.join(", "),
    judgement(row),
    row.clause ?? "",
  ];
}

function judgement(row: Measurement): string {
  const unproven = (row.unproven ?? 0) === 0 ? "" : `${row.unproven} by one threshold`;
  const open = [row.uncertain === 0 ? "" : String(row.uncertain), unproven].filter((part) => part !== "").join(", ");
  const close = open === "" ? "" : ` (${open} too close to call)`;
  switch (row.verdict) {
    case "fail":
      return `FAIL ${row.below + row.above}${close}`;
    case "too-close":
      return `too close to call: ${open}`;
    case "not-measurable":
      return "needs a capture in volts";
    case "not-seen":
      return "did not occur";
    case "pass":
      return "pass";
    default:
      return "";
  }
}

function* listed<T>(title: string, entries: readonly T[], line: (entry: T) => string): Generator<string> {
  if (entries.length === 0) return;
  yield `\n${title}: ${entries.length}\n`;
  for (const entry of entries.slice(0, SHOWN)) yield `${line(entry)}\n`;
  if (entries.length > SHOWN) yield `  and ${entries.length - SHOWN} more: see --json\n`;
}
