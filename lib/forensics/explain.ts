// In: one message and the signatures. Out: the log density of what was seen under each explanation: one controller alone; two
// together until one yields at a slot and leaves then, at the eighth or at the ninth pulse of its byte; two to the end.

import { Chain, single } from "./chain";
import type { Ledger } from "./ledger";
import { DATA_FALL, DATA_RISE, HOLD_START, LOW_NEXT, LOW_NINTH, LOW_SR, LOW_STOP, type Slots } from "./message";
import { logAdd, logNormal } from "./normal";
import type { HabitFigure, LevelFigure, Sampling, Signature } from "./signature";

/** Log densities of one message under one signature, slot by slot. */
export interface Trace {
  readonly low: Float64Array;
  readonly high: Float64Array;
  readonly data: Float64Array;
  readonly sda: Float64Array;
  readonly scl: Float64Array;
}

/** Levels of SCL within one message err together, so they count for less than independent ones would. */
const SCL_WEIGHT = 0.3;
/** How many slots a freshly started clock filter is followed before the continuous one is used again. */
const FRESH = 8;

export function trace(ledger: Ledger, slots: Slots, signature: Signature, sampling: Sampling): Trace {
  const n = slots.length;
  const column = (): Float64Array => new Float64Array(n);
  const out = { low: column(), high: column(), data: column(), sda: column(), scl: column() };
  const chain = new Chain(sampling.variance);
  for (let s = 0; s < n; s++) {
    const e = slots.entry[s];
    if (slots.pulse[s] === 0) chain.restart();
    out.low[s] = sampling.trust * lowDensity(chain, ledger.low[e], slots.lowHabit[s], signature, sampling);
    out.high[s] = sampling.trust * interval(chain, ledger.high[e], signature.habits[slots.highHabit[s]]);
    const habit = slots.dataHabit[s];
    if (habit === DATA_FALL || habit === DATA_RISE) {
      const figure = signature.habits[habit];
      out.data[s] =
        figure === null || figure.count === 0 ? anything(ledger.low[e]) : single(ledger.first[e], figure, sampling.variance);
    }
    if (ledger.sdaLevel === null || ledger.sclLevel === null || slots.own[s] === 0) continue;
    out.scl[s] = SCL_WEIGHT * levelDensity(ledger.sclLevel[e], signature.sclLow, 0.2);
    if (slots.bus[s] === 0) out.sda[s] = levelDensity(ledger.sdaLevel[e], signature.sdaLow, 0.03);
  }
  return out;
}

/** Log density where nothing is known of a habit: anywhere up to twice the interval it stands in. */
function anything(x: number): number {
  return -Math.log(2 * Math.max(x, 1));
}

/** Between bytes a target may hold SCL as long as it likes, so that a long low there is as likely whoever drives. */
function lowDensity(chain: Chain, x: number, habit: number, signature: Signature, sampling: Sampling): number {
  const between = habit === LOW_NINTH || habit === LOW_NEXT || habit === LOW_SR || habit === LOW_STOP;
  if (!between || !(x > sampling.long)) return interval(chain, x, signature.habits[habit]);
  chain.restart();
  return -Math.log(x);
}

function interval(chain: Chain, x: number, habit: HabitFigure | null): number {
  if (Number.isNaN(x)) {
    chain.restart();
    return 0;
  }
  if (habit === null) {
    chain.restart();
    return anything(x);
  }
  return chain.step(x, habit.mean, habit.jitter, habit.broken);
}

/** `other`: share of levels that are somebody else's work too (a target may hold SCL at any low). */
function levelDensity(v: number, figure: LevelFigure | null, other: number): number {
  if (Number.isNaN(v)) return 0;
  // Nothing known of this driver: anywhere below half a volt.
  if (figure === null) return Math.LN2;
  return logAdd(Math.log(1 - other) + logNormal(v, figure.mean, figure.variance), Math.log(other / Math.max(figure.mean, 0.02)));
}

/** Fresh clock densities of the slots from `from` on, against the continuous ones: what to add to the sum over the tail. */
export function freshGain(
  ledger: Ledger,
  slots: Slots,
  from: number,
  signature: Signature,
  running: Trace,
  sampling: Sampling,
): number {
  const chain = new Chain(sampling.variance);
  let gain = 0;
  const end = Math.min(slots.length, from + FRESH);
  for (let s = from; s < end; s++) {
    const e = slots.entry[s];
    if (slots.pulse[s] === 0) chain.restart();
    gain += sampling.trust * lowDensity(chain, ledger.low[e], slots.lowHabit[s], signature, sampling) - running.low[s];
    gain += sampling.trust * interval(chain, ledger.high[e], signature.habits[slots.highHabit[s]]) - running.high[s];
  }
  return gain;
}

/** START hold of one controller alone. */
export function holdAlone(hold: number, a: Signature, sampling: Sampling): number {
  const habit = a.habits[HOLD_START];
  if (Number.isNaN(hold)) return 0;
  return habit === null ? anything(hold) : single(hold, habit, sampling.variance);
}

/**
 * START hold of two: SDA falls with whoever is first, SCL with the first hold to run out. The lag between the two is taken as
 * uniform, half the time over the whole hold, half over its first third; who is first is even.
 */
export function holdTogether(hold: number, a: Signature, b: Signature, sampling: Sampling): number {
  const x = a.habits[HOLD_START];
  const y = b.habits[HOLD_START];
  if (Number.isNaN(hold)) return 0;
  if (x === null || y === null) return anything(hold);
  return Math.log(0.5) + logAdd(holdAfter(hold, x, y, sampling), holdAfter(hold, y, x, sampling));
}

function holdAfter(hold: number, first: HabitFigure, second: HabitFigure, sampling: Sampling): number {
  const full = single(hold, first, sampling.variance);
  if (second.mean >= first.mean) return full;
  const room = first.mean - second.mean;
  const sd = Math.sqrt(first.jitter + 2 * sampling.variance);
  const inside = hold > second.mean - 2 * sd && hold < first.mean + 2 * sd ? 1 : 0;
  let out = Number.NEGATIVE_INFINITY;
  for (const reach of [first.mean, first.mean / 3]) {
    const squeezed = Math.min(1, room / reach);
    const density = inside * (squeezed / Math.min(room, reach));
    const whole = logAdd(Math.log(1 - squeezed + 1e-9) + full, Math.log(density + 1e-12 / first.mean));
    out = logAdd(out, Math.log(0.5) + whole);
  }
  return out;
}
