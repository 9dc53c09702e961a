// In: a controller's log as text. Out: its entries on the log's own clock. Either CSV with the columns time, controller, message
// (a header is optional), or lines that begin with a time: "12.345678 C1: arbitration lost", "[ 12.345678] i2c-1: timeout".

import { ok, type Problem, type Result, refuse } from "../base/result";
import type { LogEntry } from "../forensics/contract";
import { tableOf } from "./table";

const SCALE: Readonly<Record<string, number>> = { "": 1, s: 1, ms: 1e-3, us: 1e-6, µs: 1e-6, μs: 1e-6, ns: 1e-9 };
//                     [   12.345678]   or  12.3 ms   then the rest
const LINE = /^\[?\s*(-?\d+(?:\.\d+)?(?:e[+-]?\d+)?)\s*(s|ms|us|µs|μs|ns)?\s*\]?(?:[\s,;:]+(.*))?$/i;
// 2026-04-01T09:30:00.125Z then the rest
const DATED = /^\[?(\d{4}-\d\d-\d\d[T ]\d\d:\d\d:\d\d(?:\.\d+)?(?:Z|[+-]\d\d:?\d\d)?)\]?[\s,;:]+(.*)$/;
// "C1: lost arbitration", "i2c i2c-1: timeout"
const SPEAKER = /^(?:i2c )?([A-Za-z][\w.-]*):\s+(.*)$/;

export function readLog(text: string): Result<LogEntry[]> {
  const table = tableOf(text);
  if (table.ok && table.value.length > 0 && table.value.every((record) => record.cells.length >= 3))
    return fromTable(table.value);
  const entries: LogEntry[] = [];
  for (const [i, raw] of text.split(/\r\n|\r|\n/).entries()) {
    const line = raw.replace(/^\uFEFF/, "").trim();
    if (line === "" || line.startsWith("#")) continue;
    const entry = entryOf(line);
    if (entry === null) return refuse(bad(i + 1, `"${line.slice(0, 60)}" does not begin with a time`));
    entries.push(entry);
  }
  return ok(entries);
}

function entryOf(line: string): LogEntry | null {
  const dated = DATED.exec(line);
  if (dated !== null) return spoken(Date.parse(withZone(dated[1])) / 1000, dated[2]);
  const plain = LINE.exec(line);
  if (plain === null) return null;
  return spoken(Number(plain[1]) * SCALE[(plain[2] ?? "").toLowerCase()], plain[3] ?? "");
}

// A time without a zone is taken as UTC: only differences matter, the offset to the capture is found later.
function withZone(date: string): string {
  const iso = date.replace(" ", "T");
  return /(Z|[+-]\d\d:?\d\d)$/.test(iso) ? iso : `${iso}Z`;
}

function spoken(time_s: number, rest: string): LogEntry | null {
  if (!Number.isFinite(time_s)) return null;
  const speaker = SPEAKER.exec(rest);
  return speaker === null ? { time_s, controller: null, message: rest } : { time_s, controller: speaker[1], message: speaker[2] };
}

function fromTable(records: readonly { line: number; cells: readonly string[] }[]): Result<LogEntry[]> {
  const [head] = records;
  const names = head.cells.map((cell) => cell.toLowerCase().replace(/[\s_(].*$/, ""));
  const titled = names.includes("time") || names.includes("message");
  const at = {
    time: titled ? names.indexOf("time") : 0,
    controller: titled ? names.indexOf("controller") : 1,
    message: titled ? names.indexOf("message") : 2,
  };
  if (at.time < 0 || at.message < 0) return refuse(bad(head.line, "the header names no time or no message"));
  const unit = titled ? (/\((\w+|µs|μs)\)|_(s|ms|us|ns)$/i.exec(head.cells[at.time]) ?? []) : [];
  const scale = SCALE[(unit[1] ?? unit[2] ?? "").toLowerCase()] ?? 1;
  const entries: LogEntry[] = [];
  for (const { line, cells } of titled ? records.slice(1) : records) {
    const time = entryOf(cells[at.time]);
    if (time === null) return refuse(bad(line, `"${cells[at.time]}" is not a time`));
    const controller = at.controller < 0 ? "" : (cells[at.controller] ?? "");
    const message = titled ? (cells[at.message] ?? "") : cells.slice(2).join(", ");
    entries.push({ time_s: time.time_s * scale, controller: controller === "" ? null : controller, message });
  }
  return ok(entries);
}

function bad(line: number, what: string): Problem {
  return {
    code: "bad-log",
    message: `Line ${line} of the log: ${what}.`,
    advice: "Expected a CSV with the columns time, controller, message, or lines that begin with a time in seconds.",
    place: { line },
  };
}
