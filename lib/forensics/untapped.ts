// In: a message whose keeper and some of whose losers taps show. Out: how likely one without a tap yielded in it too, who and where:
// the same likelihoods as without taps, with what is certain held fast.

import type { Trace } from "./explain";
import type { Slots } from "./message";
import { logAdd } from "./normal";
import type { Rates } from "./posterior";
import type { Habitual } from "./retry";
import { BYTE_ACK, LEAVES, type Leaver, lastTogether, type Scales } from "./weigh";

export interface Hidden {
  readonly b: number;
  readonly at: number;
  readonly mode: number;
  readonly probability: number;
}

export interface TappedContest {
  readonly message: number;
  readonly keeper: number;
  readonly losers: readonly { readonly tap: number; readonly slot: number }[];
  /** Controllers without a tap. */
  readonly others: readonly number[];
  /** Last slot whose low no tap began. */
  readonly until: number;
}

/** Chance that one without a tap takes part in a contest that taps show. */
const ANOTHER = 0.1;

export function hiddenLoser(scales: Scales, habitual: Habitual, rates: Rates, contest: TappedContest): Hidden | null {
  const slots = scales.read(contest.message);
  const traces = scales.traces(slots);
  const seen = contest.losers.filter((l) => l.slot < slots.length);
  const known = settledModes(slots, traces, contest.keeper, seen);
  const base = explained(slots, traces, contest.keeper, known);
  let best: Hidden | null = null;
  let most = Number.NEGATIVE_INFINITY;
  let total = Number.NEGATIVE_INFINITY;
  for (const b of contest.others) {
    const rival = habitual.rival(contest.message, b, rates);
    for (let k = 0; k < slots.length; k++) {
      if (rival.at[k] <= 0 || slots.own[k] === 0) continue;
      const prior =
        Math.log(rival.at[k] / contest.others.length) + (rival.retrySlot === k ? rival.retryGain : rival.elsewhereGain);
      for (let mode = LEAVES; mode <= BYTE_ACK; mode++) {
        const end = lastTogether(slots, k, mode);
        if (end < contest.until || (mode !== LEAVES && end === k)) continue;
        const leaver = { b, at: k, mode };
        const log = prior + Math.log(rates.modes[b][mode]) + explained(slots, traces, contest.keeper, [...known, leaver]) - base;
        total = logAdd(total, log);
        if (log <= most) continue;
        most = log;
        best = { ...leaver, probability: 0 };
      }
    }
  }
  if (best === null) return null;
  const odds = Math.exp(Math.min(total + Math.log(ANOTHER / (1 - ANOTHER)), 30));
  return { ...best, probability: odds / (1 + odds) };
}

/** How each tapped loser went on after its loss, as fits best. */
function settledModes(
  slots: Slots,
  traces: (mask: number) => Trace,
  keeper: number,
  losers: TappedContest["losers"],
): readonly Leaver[] {
  let out: Leaver[] = losers.map((l) => ({ b: l.tap, at: l.slot, mode: LEAVES }));
  out.forEach((_, i) => {
    const choices = [LEAVES, 1, BYTE_ACK].map((mode) => out.map((o, j) => (j === i ? { ...o, mode } : o)));
    const weights = choices.map((choice) => explained(slots, traces, keeper, choice));
    out = choices[weights.indexOf(Math.max(...weights))];
  });
  return out;
}

/** Log density of the whole message when `keeper` makes it and each leaver drives up to its slot and clocks as its mode says. */
function explained(slots: Slots, traces: (mask: number) => Trace, keeper: number, leavers: readonly Leaver[]): number {
  const ends = leavers.map((l) => lastTogether(slots, l.at, l.mode));
  let sum = 0;
  for (let s = 0; s < slots.length; s++) {
    let clocking = 1 << keeper;
    let driving = clocking;
    let after = clocking;
    leavers.forEach((l, i) => {
      if (s <= ends[i]) clocking |= 1 << l.b;
      if (s < ends[i]) after |= 1 << l.b;
      if (s < l.at) driving |= 1 << l.b;
    });
    const c = traces(clocking);
    const d = traces(driving);
    sum += c.low[s] + c.scl[s] + d.data[s] + d.sda[s];
    sum += clocking === after ? c.high[s] : Math.log(0.5) + logAdd(c.high[s], traces(after).high[s]);
  }
  return sum;
}
