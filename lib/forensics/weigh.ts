// In: one message that no controller alone seems to have made, the signatures, what rivals usually send. Out: every explanation
// of it with its log weight, before the capture's own rates are put in.

import { freshGain, holdAlone, holdTogether, type Trace, trace } from "./explain";
import type { Ledger } from "./ledger";
import { BUS_STOP, type Messages, newSlots, readMessage, type Slots } from "./message";
import { logAdd } from "./normal";
import type { Habitual, RetryRates, Rival } from "./retry";
import type { Sampling, Signature } from "./signature";

export const LEAVES = 0;
export const BYTE = 1;
export const BYTE_ACK = 2;

/** `a` kept the bus, `b` yielded at slot `at`. at = -1: both said the same to the end. */
export interface Option {
  readonly a: number;
  readonly b: number;
  readonly at: number;
  readonly mode: number;
  readonly log: number;
}

export interface Weighed {
  readonly message: number;
  /** Per controller alone, natural log. */
  readonly alone: Float64Array;
  /** One controller, with lows longer by one unknown amount up to some slot: a target that stretches every bit. */
  readonly slowed: number;
  readonly options: readonly Option[];
}

const LOOK = 180;

export class Scales {
  private readonly pairs: Signature[][];
  private readonly slots = newSlots();

  constructor(
    readonly ledger: Ledger,
    readonly messages: Messages,
    readonly signatures: readonly Signature[],
    readonly sampling: Sampling,
    pairs: readonly (readonly Signature[])[],
  ) {
    this.pairs = pairs.map((row) => [...row]);
  }

  read(m: number): Slots {
    readMessage(this.ledger, this.messages, m, this.slots, LOOK);
    return this.slots;
  }

  pair(a: number, b: number): Signature {
    return this.pairs[a][b];
  }

  weigh(m: number, habitual: Habitual, rates: RetryRates): Weighed {
    const slots = this.read(m);
    const { ledger, signatures, sampling } = this;
    const hold = ledger.hold[this.messages.first[m]];
    const traces = signatures.map((s) => trace(ledger, slots, s, sampling));
    const alone = new Float64Array(signatures.length);
    let slowed = Number.NEGATIVE_INFINITY;
    traces.forEach((t, c) => {
      const start = holdAlone(hold, signatures[c], sampling);
      alone[c] = sum(t) + start;
      slowed = logAdd(slowed, slow(ledger, slots, signatures[c], t, sampling) + alone[c]);
    });
    const options: Option[] = [];
    for (let a = 0; a < signatures.length; a++) {
      const fresh = this.freshGains(slots, a, traces[a]);
      for (let b = 0; b < signatures.length; b++) {
        if (a === b) continue;
        const both = trace(ledger, slots, this.pairs[a][b], sampling);
        const start = holdTogether(hold, signatures[a], signatures[b], sampling);
        this.pairOptions(options, slots, a, b, traces[a], both, fresh, start, habitual.rival(m, b, rates));
      }
    }
    const best = options.reduce((most, o) => Math.max(most, o.log), Number.NEGATIVE_INFINITY);
    return { message: m, alone, slowed, options: options.filter((o) => o.log > best - 25) };
  }

  /** Gain of starting the clock filter afresh after each slot. */
  private freshGains(slots: Slots, a: number, running: Trace): Float64Array {
    const out = new Float64Array(slots.length + 1);
    for (let s = 0; s < slots.length; s++) {
      if (slots.own[s] === 0 && slots.pulse[s] % 9 !== 8) continue;
      out[s] = freshGain(this.ledger, slots, s + 1, this.signatures[a], running, this.sampling);
    }
    return out;
  }

  private pairOptions(
    out: Option[],
    slots: Slots,
    a: number,
    b: number,
    one: Trace,
    both: Trace,
    fresh: Float64Array,
    start: number,
    rival: Rival,
  ): void {
    const n = slots.length;
    const low = gains(both.low, one.low);
    const high = gains(both.high, one.high);
    const data = gains(both.data, one.data);
    const sda = gains(both.sda, one.sda);
    const scl = gains(both.scl, one.scl);
    const base = sum(one) + start;
    for (let k = 0; k < n; k++) {
      if (rival.at[k] <= 0 || slots.own[k] === 0) continue;
      const prior = Math.log(rival.at[k]) + (rival.retrySlot === k ? rival.retryGain : rival.elsewhereGain);
      for (let mode = LEAVES; mode <= BYTE_ACK; mode++) {
        const g = lastTogether(slots, k, mode);
        if (mode !== LEAVES && g === k) continue;
        const lastHigh = logAdd(Math.log(0.5) + both.high[g], Math.log(0.5) + one.high[g]) - one.high[g];
        const log = base + low[g + 1] + high[g] + lastHigh + data[k] + sda[k] + scl[g + 1] + fresh[g] + prior;
        out.push({ a, b, at: k, mode, log });
      }
    }
    const tie = base + low[n] + high[n] + data[n] + sda[n] + scl[n] + Math.log(rival.same);
    out.push({ a, b, at: -1, mode: LEAVES, log: tie });
  }
}

/** Last slot in which the yielding controller still clocks. */
export function lastTogether(slots: Slots, k: number, mode: number): number {
  if (mode === LEAVES || slots.bus[k] === BUS_STOP) return k;
  const end = mode === BYTE ? 7 : 8;
  let s = k;
  while (
    s + 1 < slots.length &&
    slots.pulse[s] % 9 < end &&
    slots.transaction[s + 1] === slots.transaction[k] &&
    slots.bus[s + 1] < 2
  )
    s++;
  return s;
}

function sum(t: Trace): number {
  let total = 0;
  for (let s = 0; s < t.low.length; s++) total += t.low[s] + t.high[s] + t.data[s] + t.sda[s] + t.scl[s];
  return total;
}

/** Running sums of x - y: entry i is the sum over slots below i. */
function gains(x: Float64Array, y: Float64Array): Float64Array {
  const out = new Float64Array(x.length + 1);
  for (let s = 0; s < x.length; s++) out[s + 1] = out[s] + x[s] - y[s];
  return out;
}

/** Log weight, against that controller alone, of lows inside bytes longer by one unknown amount from the start up to some slot. */
function slow(ledger: Ledger, slots: Slots, signature: Signature, one: Trace, sampling: Sampling): number {
  let out = Number.NEGATIVE_INFINITY;
  let n = 0;
  let mean = 0;
  let square = 0;
  let given = 0;
  for (let s = 0; s < slots.length; s++) {
    const habit = signature.habits[slots.lowHabit[s]];
    if (habit === null || slots.lowHabit[s] !== 1) continue;
    const variance = habit.jitter + 2 * sampling.variance;
    const x = ledger.low[slots.entry[s]] - habit.mean;
    n++;
    const d = x - mean;
    mean += d / n;
    square += d * (x - mean);
    given += one.low[s];
    if (n < 3 || mean <= 0) continue;
    const fit = -0.5 * n * Math.log(2 * Math.PI * variance) - square / (2 * variance);
    const width = 0.5 * Math.log((2 * Math.PI * variance) / n) - Math.log(mean * Math.log(1000));
    out = logAdd(out, fit + width - given);
  }
  return out - Math.log(slots.length + 1);
}
