// In: a judged contest. Out: what each kind of observation says for it or against it, in bits of log-odds, with a sentence that
// states what stands on the lines and no more.

import type { Contest } from "../diagnosis/report";
import { holdAlone, holdTogether } from "./explain";
import { DATA_FALL, DATA_RISE, HIGH_IN, HOLD_START, LOW_IN } from "./message";
import type { Habitual, RetryRates } from "./retry";
import { visibility } from "./together";
import { lastTogether, type Option, type Scales } from "./weigh";

export type Evidence = Contest["evidence"][number];

const BITS = 1 / Math.LN2;

export interface Naming {
  /** Id of a controller in the report. */
  id(controller: number): string;
  microseconds(ticks: number): string;
}

export function evidenceOf(
  scales: Scales,
  m: number,
  option: Option,
  alone: number,
  habitual: Habitual,
  rates: RetryRates,
  name: Naming,
): Evidence[] {
  const { ledger, signatures, sampling } = scales;
  const slots = scales.read(m);
  const traces = scales.traces(slots);
  const single = traces(1 << alone);
  const one = traces(1 << option.a);
  const g = lastTogether(slots, option.at, option.mode);
  const { early } = option;
  const gEarly = early === null ? -1 : lastTogether(slots, early.at, early.mode);
  // Who clocks, and who drives SDA, in slot s.
  const clocking = (s: number): number =>
    (1 << option.a) | (s <= g ? 1 << option.b : 0) | (early !== null && s <= gEarly ? 1 << early.b : 0);
  const driving = (s: number): number =>
    (1 << option.a) | (s < option.at ? 1 << option.b : 0) | (early !== null && s < early.at ? 1 << early.b : 0);
  let clock = 0;
  let data = 0;
  let level = 0;
  for (let s = 0; s < slots.length; s++) {
    const c = traces(clocking(s));
    const d = traces(driving(s));
    clock += c.low[s] - single.low[s];
    clock += (s === g ? Math.max(c.high[s], one.high[s]) : c.high[s]) - single.high[s];
    data += d.data[s] - single.data[s];
    level += d.sda[s] - single.sda[s] + c.scl[s] - single.scl[s];
  }
  const hold = ledger.hold[scales.messages.first[m]];
  const start =
    holdTogether(hold, signatures[option.a], signatures[option.b], sampling) - holdAlone(hold, signatures[alone], sampling);
  const rival = habitual.rival(m, option.b, rates);
  const out: Evidence[] = [];
  const add = (kind: Evidence["kind"], nats: number, detail: string): void => {
    const bits = Math.round(nats * BITS * 10) / 10;
    if (Math.abs(bits) >= 0.1) out.push({ kind, bits, detail });
  };
  const a = name.id(option.a);
  const b = name.id(option.b);
  const mean = (c: number, habit: number): string => name.microseconds(signatures[c].habits[habit]?.mean ?? Number.NaN);
  add("clock-sync", clock, clockWords(a, b, mean, option, g, slots.pulse[g]));
  add(
    "data-timing",
    data,
    `SDA falls ${mean(option.a, DATA_FALL)} and rises ${mean(option.a, DATA_RISE)} after SCL where ${a} drives alone; ${b}: ${mean(option.b, DATA_FALL)} and ${mean(option.b, DATA_RISE)}.`,
  );
  add("low-level", level, `The low level of the lines up to the deciding bit against that of ${a} alone.`);
  add(
    "start",
    start,
    `SCL falls ${name.microseconds(hold)} after SDA; ${a} holds ${mean(option.a, HOLD_START)}, ${b} ${mean(option.b, HOLD_START)}.`,
  );
  if (rival.retry >= 0) {
    const gain = rival.retrySlot === option.at ? rival.retryGain : rival.elsewhereGain;
    const share = (rival.base * 100).toFixed(rival.base < 0.1 ? 1 : 0);
    const words =
      rival.retrySlot === option.at ? "has 1 where this one has 0 at the deciding bit" : "parts from this one at another bit";
    add(
      "retry",
      gain,
      `The next message of ${b} equals this one up to there and ${words}; ${share} % of its messages would by chance.`,
    );
  } else add("retry", rival.elsewhereGain, `No message of ${b} that would be its retry follows.`);
  if (visibility(signatures[option.a], scales.signature((1 << option.a) | (1 << option.b)), sampling.variance) < 1) {
    out.push({
      kind: "clock-sync",
      bits: 0,
      detail: `${a} and ${b} clocking together would look like ${a} alone: no bus-only evidence could exist here.`,
    });
  }
  return out;
}

function clockWords(
  a: string,
  b: string,
  mean: (c: number, h: number) => string,
  option: Option,
  g: number,
  pulse: number,
): string {
  const until = g === option.at ? "the deciding bit" : `pulse ${pulse}, the end of its byte`;
  return `Up to ${until} SCL is low as long as the longer of ${a} (${mean(option.a, LOW_IN)}) and ${b} (${mean(option.b, LOW_IN)}), high as short as the shorter (${mean(option.a, HIGH_IN)}, ${mean(option.b, HIGH_IN)}); after it the clock is that of ${a}.`;
}
