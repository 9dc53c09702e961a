// In: one message that no controller alone seems to have made, the signatures, what rivals usually send. Out: every explanation
// of it with its log weight, before the capture's own rates are put in.

import { freshGain, holdAlone, holdTogether, type Trace, trace } from "./explain";
import type { Ledger } from "./ledger";
import { BUS_STOP, HIGH_IN, LOW_IN, type Messages, newSlots, readMessage, type Slots } from "./message";
import { logAdd } from "./normal";
import type { Habitual, RetryRates, Rival } from "./retry";
import type { Sampling, Signature } from "./signature";
import { together } from "./together";

export const LEAVES = 0;
export const BYTE = 1;
export const BYTE_ACK = 2;

/** `a` kept the bus, `b` yielded at slot `at`. at = -1: both said the same to the end. */
export interface Option {
  readonly a: number;
  readonly b: number;
  readonly at: number;
  readonly mode: number;
  /** A third that yielded too, not later than `b`; null with two contenders. */
  readonly early: Leaver | null;
  readonly log: number;
}

export interface Leaver {
  readonly b: number;
  readonly at: number;
  readonly mode: number;
}

/** What taps tell of a message beforehand. */
export interface Known {
  /** The tapped controller that made it, or -1. */
  readonly keeper: number;
  /** Controllers below this number are tapped and did not yield. */
  readonly held: number;
}

const NOTHING_KNOWN: Known = { keeper: -1, held: 0 };

export interface Weighed {
  readonly message: number;
  /** Per controller alone, natural log. */
  readonly alone: Float64Array;
  /** One controller, with lows longer by one unknown amount up to some slot: a target that stretches every bit. */
  readonly slowed: number;
  readonly options: readonly Option[];
}

const LOOK = 180;
/** Lows between bytes this many times as long as any controller's inside bytes may be a target's stretching. */
const TARGETS_OWN = 1.5;
/** A third contender is looked for when two explain this much better than one, natural log. */
const WORTH_A_THIRD = 4;

export class Scales {
  private readonly mixed = new Map<number, Signature>();
  private readonly slots = newSlots();
  readonly sampling: Sampling;

  constructor(
    readonly ledger: Ledger,
    readonly messages: Messages,
    readonly signatures: readonly Signature[],
    sampling: Sampling,
    private readonly vdd: number | null,
  ) {
    const longest = signatures.reduce((most, s) => Math.max(most, s.habits[LOW_IN]?.mean ?? 0), 0);
    this.sampling = { ...sampling, long: TARGETS_OWN * longest };
  }

  read(m: number): Slots {
    readMessage(this.ledger, this.messages, m, this.slots, LOOK);
    return this.slots;
  }

  /** Signature of the controllers whose bits are set in `mask`, driving together. */
  signature(mask: number): Signature {
    let found = this.mixed.get(mask);
    if (found === undefined) {
      const low = 31 - Math.clz32(mask & -mask);
      const rest = mask & (mask - 1);
      found = rest === 0 ? this.signatures[low] : together(this.signatures[low], this.signature(rest), this.vdd);
      this.mixed.set(mask, found);
    }
    return found;
  }

  /** Traces of the message last read, by mask. */
  traces(slots: Slots): (mask: number) => Trace {
    const known = new Map<number, Trace>();
    return (mask) => {
      let found = known.get(mask);
      if (found === undefined) {
        found = trace(this.ledger, slots, this.signature(mask), this.sampling);
        known.set(mask, found);
      }
      return found;
    };
  }

  weigh(m: number, habitual: Habitual, rates: RetryRates, known: Known = NOTHING_KNOWN): Weighed {
    const slots = this.read(m);
    const { ledger, signatures, sampling } = this;
    const kinds = signatures.length;
    const hold = ledger.hold[this.messages.first[m]];
    const traces = this.traces(slots);
    const alone = new Float64Array(kinds);
    let slowed = Number.NEGATIVE_INFINITY;
    const shown = signatures.map((s) => s.habits[LOW_IN] !== null && s.habits[HIGH_IN] !== null);
    for (let c = 0; c < kinds; c++) {
      // A tapped controller that never spoke in this capture has no habits to compare.
      if (!shown[c] || (known.keeper >= 0 && c !== known.keeper)) {
        alone[c] = Number.NEGATIVE_INFINITY;
        continue;
      }
      const one = traces(1 << c);
      alone[c] = sum(one) + holdAlone(hold, signatures[c], sampling);
      slowed = logAdd(slowed, slow(ledger, slots, signatures[c], one, sampling) + alone[c]);
    }
    const rivals = signatures.map((_, c) => habitual.rival(m, c, rates));
    const options: Option[] = [];
    for (let a = 0; a < kinds; a++) {
      if (!shown[a] || (known.keeper >= 0 && a !== known.keeper)) continue;
      const fresh = this.freshGains(slots, 1 << a, traces(1 << a));
      for (let b = 0; b < kinds; b++) {
        if (a === b || !shown[b] || b < known.held) continue;
        const start = holdTogether(hold, signatures[a], signatures[b], sampling);
        pairOptions(options, slots, a, b, traces(1 << a), traces((1 << a) | (1 << b)), fresh, start, rivals[b]);
      }
    }
    const single = alone.reduce((x, y) => Math.max(x, y));
    if (options.length === 0) return { message: m, alone, slowed, options };
    const best = topOf(options);
    if (kinds > 2 && shown.every(Boolean) && best.log > single + WORTH_A_THIRD)
      this.tripleOptions(options, slots, best, traces, hold, rivals, known);
    const most = topOf(options).log;
    return { message: m, alone, slowed, options: options.filter((o) => o.log > most - 25) };
  }

  /** Gain of starting the clock filter afresh after a slot; few slots are asked for, each perhaps more than once. */
  private freshGains(slots: Slots, mask: number, running: Trace): Fresh {
    const signature = this.signature(mask);
    const known = new Float64Array(slots.length).fill(Number.NaN);
    return (s) => {
      if (Number.isNaN(known[s])) {
        const silent = slots.own[s] === 0 && slots.pulse[s] % 9 !== 8;
        known[s] = silent ? 0 : freshGain(this.ledger, slots, s + 1, signature, running, this.sampling);
      }
      return known[s];
    };
  }

  /** Three drive, `x` yields, two drive, `y` yields, `a` keeps the bus. */
  private tripleOptions(
    out: Option[],
    slots: Slots,
    best: Option,
    traces: (mask: number) => Trace,
    hold: number,
    rivals: readonly Rival[],
    known: Known,
  ): void {
    const kinds = this.signatures.length;
    // Who kept the bus shows in the long tail, so only the two most probable are tried.
    const others = out.filter((o) => o.a !== best.a);
    const keepers = new Set([best.a, others.length > 0 ? topOf(others).a : best.a]);
    for (const a of keepers) {
      const one = traces(1 << a);
      const freshOne = this.freshGains(slots, 1 << a, one);
      for (let y = 0; y < kinds; y++) {
        if (y === a || y < known.held) continue;
        const two = traces((1 << a) | (1 << y));
        const freshTwo = this.freshGains(slots, (1 << a) | (1 << y), two);
        const last = leavings(slots, rivals[y], two, one, freshOne);
        for (let x = 0; x < kinds; x++) {
          if (x === a || x === y || x < known.held) continue;
          const three = traces((1 << a) | (1 << y) | (1 << x));
          const start = Math.max(
            holdTogether(hold, this.signatures[a], this.signatures[y], this.sampling),
            holdTogether(hold, this.signatures[a], this.signatures[x], this.sampling),
          );
          const early = leavings(slots, rivals[x], three, two, freshTwo);
          const base = sum(one) + start;
          for (const e of early) {
            for (const l of last) {
              if (e.at > l.at || e.end > l.end) continue;
              // The fresh start after the first leaving is forgotten where the second follows at once.
              const log = base + e.log + l.log - (l.end === e.end ? freshTwo(e.end) : 0);
              out.push({ a, b: y, at: l.at, mode: l.mode, early: { b: x, at: e.at, mode: e.mode }, log });
            }
          }
        }
      }
    }
  }
}

function topOf(options: readonly Option[]): Option {
  return options.reduce((x, y) => (y.log > x.log ? y : x));
}

type Fresh = (slot: number) => number;

interface Leaving {
  readonly at: number;
  readonly end: number;
  readonly mode: number;
  readonly log: number;
}

/** Log weight of `b` yielding at each slot, against what is left driving alone: `more` with it, `less` without it. */
function leavings(slots: Slots, rival: Rival, more: Trace, less: Trace, fresh: Fresh): Leaving[] {
  const out: Leaving[] = [];
  const low = gains(more.low, less.low);
  const high = gains(more.high, less.high);
  const data = gains(more.data, less.data);
  const sda = gains(more.sda, less.sda);
  const scl = gains(more.scl, less.scl);
  for (let k = 0; k < slots.length; k++) {
    if (rival.at[k] <= 0 || slots.own[k] === 0) continue;
    const prior = Math.log(rival.at[k]) + (rival.retrySlot === k ? rival.retryGain : rival.elsewhereGain);
    for (let mode = LEAVES; mode <= BYTE_ACK; mode++) {
      const g = lastTogether(slots, k, mode);
      if (mode !== LEAVES && g === k) continue;
      const lastHigh = logAdd(Math.log(0.5) + more.high[g], Math.log(0.5) + less.high[g]) - less.high[g];
      const log = low[g + 1] + high[g] + lastHigh + data[k] + sda[k] + scl[g + 1] + fresh(g) + prior;
      out.push({ at: k, end: g, mode, log });
    }
  }
  return out;
}

function pairOptions(
  out: Option[],
  slots: Slots,
  a: number,
  b: number,
  one: Trace,
  both: Trace,
  fresh: Fresh,
  start: number,
  rival: Rival,
): void {
  const base = sum(one) + start;
  for (const l of leavings(slots, rival, both, one, fresh)) {
    out.push({ a, b, at: l.at, mode: l.mode, early: null, log: base + l.log });
  }
  out.push({ a, b, at: -1, mode: LEAVES, early: null, log: sum(both) + start + Math.log(rival.same) });
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
    out = logAdd(out, sampling.trust * (fit + width) - given);
  }
  return out - Math.log(slots.length + 1);
}
