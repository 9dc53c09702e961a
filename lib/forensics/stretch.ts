// In: every low, its controller's own habit, and which messages were contested. Out: clock stretches: where, how long, by whom.
// UM10204 3.1.9. The excess is over the controller's own low inside bytes.

import type { Timebase } from "../base/time";
import type { Stretch } from "../diagnosis/report";
import type { Census } from "./census";
import { type Ledger, VALUE } from "./ledger";
import { LOW_FIRST, LOW_IN, LOW_NEXT, LOW_NINTH, type Messages } from "./message";
import type { Sampling, Signature } from "./signature";

interface Reach {
  readonly own: number;
  readonly limit: number;
}

/** Longest low that still is the controller's own, per place in the byte. */
function reaches(signature: Signature, sampling: Sampling, paused: boolean): Reach[] {
  const inside = signature.habits[LOW_IN];
  return [LOW_FIRST, LOW_IN, LOW_NINTH, LOW_NEXT].map((h) => {
    const habit = h === LOW_NEXT && !paused ? inside : (signature.habits[h] ?? inside);
    if (habit === null || inside === null) return { own: Number.POSITIVE_INFINITY, limit: Number.POSITIVE_INFINITY };
    const sd = Math.sqrt(habit.jitter + 2 * sampling.variance);
    return { own: habit.mean, limit: habit.mean + Math.max(6 * sd, 2.1 * sampling.step, 0.08 * inside.mean) };
  });
}

/**
 * A controller that fetches its next byte late lengthens the low before every next byte, whoever is addressed; a target does so
 * only in its own transactions. Where only one address was ever used the low is put down to the target.
 */
function pauses(ledger: Ledger, messages: Messages, census: Census, c: number, address: Int16Array, sampling: Sampling): boolean {
  const next = census.signatures[c].habits[LOW_NEXT];
  const inside = census.signatures[c].habits[LOW_IN];
  if (next === null || inside === null || next.count < 2) return false;
  const longer = next.mean - inside.mean > Math.max(2.1 * sampling.step, 0.08 * inside.mean);
  if (!longer) return false;
  const seen = new Map<number, { all: number; plain: number }>();
  for (let m = 0; m < messages.count; m++) {
    if (census.by[m] !== c) continue;
    for (let t = messages.first[m]; t < messages.first[m + 1]; t++) {
      const row = seen.get(address[t]) ?? { all: 0, plain: 0 };
      for (let p = 9; p < ledger.pulses(t); p += 9) {
        row.all++;
        if (ledger.low[ledger.openEntry[t] + 1 + p] < inside.mean + 0.5 * (next.mean - inside.mean)) row.plain++;
      }
      seen.set(address[t], row);
    }
  }
  const rows = [...seen.values()].filter((row) => row.all > 0);
  return rows.length > 1 && rows.every((row) => row.plain < 0.1 * row.all);
}

export interface StretchContext {
  readonly ledger: Ledger;
  readonly messages: Messages;
  readonly census: Census;
  /** Controller per message after contests were settled. */
  readonly by: Int16Array;
  /** Per message, first entry index from which nobody but the remaining controller clocks; 0 where there was no contest. */
  readonly contestedUntil: Float64Array;
  readonly address: Int16Array;
  readonly sampling: Sampling;
  readonly timebase: Timebase;
}

export function stretchesOf(context: StretchContext): Stretch[] {
  const { ledger, messages, census, by, sampling, timebase } = context;
  const paused = census.signatures.map((_, c) => pauses(ledger, messages, census, c, context.address, sampling));
  const table = census.signatures.map((s, c) => reaches(s, sampling, paused[c]));
  const longest = longestOf(table);
  const out: Stretch[] = [];
  for (let m = 0; m < messages.count; m++) {
    const reach = by[m] >= 0 ? table[by[m]] : longest;
    if (reach.length === 0) continue;
    for (let t = messages.first[m]; t < messages.first[m + 1]; t++) {
      const base = ledger.openEntry[t] + 1;
      const pulses = ledger.pulses(t);
      let bit = 0;
      for (let p = 0; p < pulses; p++) {
        const low = ledger.low[base + p];
        const r = reach[p === 0 ? 0 : bit === 0 ? 3 : bit === 8 ? 2 : 1];
        const limit = base + p <= context.contestedUntil[m] ? Math.max(r.limit, longest[1].limit) : r.limit;
        if (low > limit) {
          const perSecond = timebase.ticksPerSecond;
          out.push({
            transaction: t,
            byte: Math.floor(p / 9),
            bit,
            start_s: (ledger.riseTick(t, p) - low) / perSecond,
            low_s: low / perSecond,
            excess_s: (low - r.own) / perSecond,
            by: holder(ledger, base + p, bit, by[m] >= 0 && paused[by[m]]),
          });
        }
        bit = bit === 8 ? 0 : bit + 1;
      }
    }
  }
  return out;
}

function longestOf(table: readonly Reach[][]): Reach[] {
  if (table.length === 0) return [];
  return table[0].map((_, i) => table.map((r) => r[i]).reduce((x, y) => (y.limit > x.limit ? y : x)));
}

/**
 * Before the ninth pulse the target has to decide on its acknowledge; before a next byte the target that acknowledged has work to
 * do. A controller that is late itself puts its first bit on SDA late: SDA moves near the end of the low.
 */
function holder(ledger: Ledger, entry: number, bit: number, paused: boolean): Stretch["by"] {
  if (bit === 8) return "target";
  if (bit === 0) {
    const late = ledger.last[entry] > 0.75 * ledger.low[entry] && ledger.first[entry] !== ledger.last[entry];
    const acknowledged = entry > 0 && (ledger.what[entry - 1] & VALUE) === 0;
    if (late || !acknowledged) return "controller";
    return paused ? "unknown" : "target";
  }
  return "unknown";
}
