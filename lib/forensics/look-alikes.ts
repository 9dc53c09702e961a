// In: contests already settled, the ledger, the log. Out: faults of kind "look-alike": places at which a controller would report, or did
// report, lost arbitration although nothing here shows a second controller. Each names what stands on the lines and what to do.
// FIELD notes C1; UM10204 3.1.7 - 3.1.9, 3.1.16.

import type { Fault } from "../diagnosis/report";
import { LOST, REPEATED_START, START, STOP } from "../engine/bits/bits";
import type { Capture } from "./capture";
import type { ContestFindings } from "./contests";
import { KIND, VALUE } from "./ledger";

/** SMBus tTIMEOUT, from 25 ms on. */
const TIMEOUT_S = 25e-3;

export function lookAlikesOf(capture: Capture, found: ContestFindings): Fault[] {
  const contested = new Set(found.contests.filter((c) => c.probability >= 0.5).map((c) => c.transaction));
  const out: Fault[] = [];
  for (let t = 0; t < capture.ledger.transactions; t++) {
    if (contested.has(t)) continue;
    const cause = brokenOff(capture, t);
    if (cause !== null) out.push(cause);
  }
  out.push(...flagOnly(capture, found, contested, new Set(out.map((f) => f.transaction))));
  return out.sort((a, b) => a.time_s - b.time_s);
}

/** A transaction that ends inside a byte: what stands on the lines there. Null for one that ends lawfully. */
function brokenOff(capture: Capture, t: number): Fault | null {
  const { ledger, timebase } = capture;
  const pulses = ledger.pulses(t);
  const close = ledger.closeEntry[t];
  if (pulses % 9 === 0 || close >= ledger.count) return null;
  const perSecond = timebase.ticksPerSecond;
  const kind = ledger.what[close] & KIND;
  const last = close - 1;
  const at = ledger.riseTick(t, pulses - 1) / perSecond;
  const add = (time_s: number, detail: string): Fault => ({ kind: "look-alike", transaction: t, time_s, detail });
  for (let p = 0; p < pulses; p++) {
    const low = ledger.low[ledger.openEntry[t] + 1 + p] / perSecond;
    if (low < TIMEOUT_S) continue;
    return add(
      at,
      `SMBus timeout: SCL was low for ${(low * 1e3).toFixed(1)} ms before this transaction broke off. Find who held SCL, or allow the stretch.`,
    );
  }
  const low = (ledger.what[last] & VALUE) === 0;
  if (kind === START || kind === REPEATED_START || kind === STOP) {
    const name = kind === STOP ? "STOP" : "START";
    const set = ledger.high[close];
    const quick = set > 0 && set < 0.5 * typicalHigh(capture, t);
    const what = quick
      ? `SDA changes ${((set / perSecond) * 1e9).toFixed(0)} ns after SCL rises inside a byte, which reads as ${name}: a late or slow data edge, or noise`
      : `SDA changes while SCL is high inside a byte, which reads as ${name}: noise on SDA, or a controller that gave up`;
    return add(
      at,
      `${what}. A controller sending here would report lost arbitration. Look at the edge in volts before suspecting another controller.`,
    );
  }
  if (kind !== LOST || !low) return null;
  return add(
    at,
    "SDA low, and no clock follows: a target may hold SDA after losing count of clocks. Nine SCL pulses and a STOP free it (UM10204 3.1.16).",
  );
}

function typicalHigh(capture: Capture, t: number): number {
  const { ledger } = capture;
  const base = ledger.openEntry[t] + 1;
  let sum = 0;
  let n = 0;
  for (let p = 0; p + 1 < ledger.pulses(t); p++) {
    sum += ledger.high[base + p];
    n++;
  }
  return n > 0 ? sum / n : 0;
}

/** Losses that the log reports where the lines show a lawful transaction and nothing of a contest. */
function flagOnly(
  capture: Capture,
  found: ContestFindings,
  contested: ReadonlySet<number>,
  broken: ReadonlySet<number | null>,
): Fault[] {
  const { alignment } = found;
  if (!alignment.found) return [];
  const { ledger, endTick, timebase } = capture;
  const perSecond = timebase.ticksPerSecond;
  const out: Fault[] = [];
  for (const loss of alignment.losses) {
    const near = nearest(capture, loss.time_s, alignment.tolerance_s);
    if (near < 0 || broken.has(near)) continue;
    const first = capture.messages.first[capture.messages.of[near]];
    const next = capture.messages.first[capture.messages.of[near] + 1];
    let settled = false;
    for (let t = first; t < next; t++) settled ||= contested.has(t);
    if (settled) continue;
    const who = loss.entry.controller ?? "A controller";
    out.push({
      kind: "look-alike",
      transaction: near,
      time_s: Math.min(Math.max(loss.time_s, ledger.openTick[near] / perSecond), endTick[near] / perSecond),
      detail: `Wire legal, flag set: ${who} reports "${loss.entry.message.slice(0, 60)}" here; the lines show a lawful transaction and no sign that a second controller drove. Look at its filter, hold time and errata; a contest that these clocks cannot show is not excluded.`,
    });
  }
  return out;
}

/** Transaction that a time falls into, or the nearest within the tolerance; -1 for none. */
function nearest(capture: Capture, time_s: number, tolerance_s: number): number {
  const perSecond = capture.timebase.ticksPerSecond;
  const { openTick, transactions } = capture.ledger;
  let low = 0;
  let high = transactions;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (openTick[middle] / perSecond <= time_s) low = middle + 1;
    else high = middle;
  }
  const t = low - 1;
  if (t >= 0 && time_s <= capture.endTick[t] / perSecond + tolerance_s) return t;
  return low < transactions && openTick[low] / perSecond - time_s <= tolerance_s ? low : -1;
}
