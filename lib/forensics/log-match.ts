// In: a controller log and the times of likely contests. Out: the offset and drift between the log's clock and the capture's, found
// from the events themselves, and what each log line then says for or against a contest.

import type { PlacedLog } from "../diagnosis/report";
import type { Capture } from "./capture";
import type { LogEntry } from "./contract";
import type { Evidence } from "./evidence";

/** Words and codes by which controllers and drivers report lost arbitration (REFERENCE 8.2; EAGAIN is Linux's errno 11). */
const LOST =
  /arbitration|\bEAGAIN\b|\berrno\s*[:=]?\s*-?11\b|(?:^|[\s(=:])-11(?![\d.])|\bARLO\b|\bARBL\b|\bARB_?LOST\b|\bAL\b|\bLAB\b/i;

export function reportsLoss(entry: LogEntry): boolean {
  return LOST.test(entry.message);
}

export interface Alignment {
  readonly found: boolean;
  /** log time = offset_s + (1 + drift) capture time. */
  readonly offset_s: number;
  readonly drift: number;
  /** Half-width within which a log line belongs to an event, seconds. */
  readonly tolerance_s: number;
  /** Times of reported losses on the capture's clock. */
  readonly losses: readonly { readonly time_s: number; readonly entry: LogEntry }[];
  /** Probability that some reported loss lies so near to any given instant by chance. */
  readonly chance: number;
}

export const NO_ALIGNMENT: Alignment = { found: false, offset_s: 0, drift: 0, tolerance_s: 0, losses: [], chance: 1 };

/** A controller notices a loss, and writes about it, some time later; its clock runs off by up to so much. */
const LATE_S = 4e-4;
const OFF = 1e-4;
/** A log that names a contest does so four times in five; it misses one in five. */
const TELLS = 0.8;

export function align(capture: Capture, events: readonly { readonly time_s: number; readonly weight: number }[]): Alignment {
  const entries = capture.log.filter(reportsLoss);
  const likely = events.filter((e) => e.weight > 0.3);
  if (entries.length < 2 || likely.length < 2) return NO_ALIGNMENT;
  const span = likely[likely.length - 1].time_s - likely[0].time_s;
  const coarse = Math.min(5e-3, LATE_S + OFF * span);
  let best = { offset: 0, matched: 0 };
  for (const entry of entries.slice(0, 40)) {
    for (const event of likely.slice(0, 400)) {
      const offset = entry.time_s - event.time_s;
      const matched = pairs(entries, likely, offset, 0, coarse).length;
      if (matched > best.matched) best = { offset, matched };
    }
  }
  const byChance = entries.length * Math.min(1, (likely.length * 2 * coarse) / Math.max(span, coarse));
  if (best.matched < Math.max(2, Math.min(3, entries.length), 2.5 * byChance)) return NO_ALIGNMENT;
  const matched = pairs(entries, likely, best.offset, 0, coarse);
  const line = straightLine(matched, best.offset);
  const spread = Math.sqrt(
    matched.reduce((s, p) => s + (p.log - line.offset - (1 + line.drift) * p.event) ** 2, 0) / matched.length,
  );
  const tolerance_s = Math.min(coarse, Math.max(6e-5, 5 * spread));
  const losses = entries.map((entry) => ({ time_s: (entry.time_s - line.offset) / (1 + line.drift), entry }));
  const chance = Math.min(0.5, Math.max(1e-3, (entries.length * 2 * tolerance_s) / Math.max(span, tolerance_s)));
  return { found: true, offset_s: line.offset, drift: line.drift, tolerance_s, losses, chance };
}

function pairs(
  entries: readonly LogEntry[],
  events: readonly { readonly time_s: number }[],
  offset: number,
  drift: number,
  tolerance: number,
) {
  const out: { log: number; event: number }[] = [];
  for (const entry of entries) {
    const at = (entry.time_s - offset) / (1 + drift);
    let nearest = Number.POSITIVE_INFINITY;
    for (const event of events) if (Math.abs(event.time_s - at) < Math.abs(nearest - at)) nearest = event.time_s;
    if (Math.abs(nearest - at) <= tolerance) out.push({ log: entry.time_s, event: nearest });
  }
  return out;
}

/** Least squares of log time on capture time; drift only where three pairs or more carry it, and never beyond 500 ppm. */
function straightLine(matched: readonly { log: number; event: number }[], offset: number): { offset: number; drift: number } {
  const n = matched.length;
  const x = matched.reduce((s, p) => s + p.event, 0) / n;
  const y = matched.reduce((s, p) => s + p.log - p.event, 0) / n;
  if (n < 3) return { offset: y, drift: 0 };
  let xy = 0;
  let xx = 0;
  for (const p of matched) {
    xy += (p.event - x) * (p.log - p.event - y);
    xx += (p.event - x) ** 2;
  }
  const drift = xx > 0 ? xy / xx : 0;
  return Math.abs(drift) > 5e-4 ? { offset, drift: 0 } : { offset: y - drift * x, drift };
}

/** Lines of a log that one report carries. */
const LINES = 5000;

/** The log as the report carries it: its lines on the capture's clock, as far as they fall into the record. Null without a log. */
export function placed(log: readonly LogEntry[], alignment: Alignment, from_s: number, to_s: number): PlacedLog | null {
  if (log.length === 0) return null;
  const { found, offset_s, drift, tolerance_s } = alignment;
  if (!found) return { aligned: false, entries: log.length, offset_s: null, drift: null, tolerance_s: null, lines: [] };
  const lines = log
    .map((entry) => ({
      time_s: (entry.time_s - offset_s) / (1 + drift),
      controller: entry.controller,
      message: entry.message,
      loss: reportsLoss(entry),
    }))
    .filter((line) => line.time_s >= from_s - tolerance_s && line.time_s <= to_s + tolerance_s)
    .sort((a, b) => a.time_s - b.time_s)
    .slice(0, LINES);
  return { aligned: true, entries: log.length, offset_s, drift, tolerance_s, lines };
}

/** Probability of a contest once the log is heard, and the log's share in it. */
export function withLog(
  probability: number,
  time_s: number,
  alignment: Alignment,
): { probability: number; evidence: Evidence | null } {
  if (!alignment.found) return { probability, evidence: null };
  const hit = alignment.losses.find((l) => Math.abs(l.time_s - time_s) <= alignment.tolerance_s);
  // A log of one controller is silent about the other's losses, so silence counts for little.
  const ratio = hit === undefined ? 0.7 : TELLS / alignment.chance;
  const odds = (probability / (1 - probability + 1e-12)) * ratio;
  const bits = Math.round(Math.log2(ratio) * 10) / 10;
  const who = hit?.entry.controller ?? "a controller";
  const detail =
    hit === undefined
      ? "The log reports no loss at this time."
      : `The log of ${who} reports "${hit.entry.message.slice(0, 60)}" here, its clock being ${alignment.offset_s.toFixed(4)} s ahead.`;
  return { probability: odds / (1 + odds), evidence: { kind: "log", bits, detail } };
}
