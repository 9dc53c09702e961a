// In: bits, block by block. Out: the few moments that rules need and bytes do not show: runts, SDA pulses inside one SCL high,
// long holds, late repeated STARTs, clocks given to a held line, levels that are not levels. One pass for all rules.

import { ticks } from "../base/time";
import { BIT, type BitBlock, LOST, OUTSIDE, START, STOP } from "../engine/bits/bits";
import type { CaptureHead } from "../engine/samples/reader";
import type { Findings } from "./rule";

export type MomentKind =
  /** An SCL high far shorter than the one before it in the same transaction. */
  | "runt"
  /** SDA went and came back within one SCL high, inside a byte. */
  | "pulse"
  /** SCL was high for many bit times before a repeated START. */
  | "late-start"
  /** SDA low while SCL stayed high for many bit times. */
  | "held-sda"
  /** SCL low for 25 ms or more. */
  | "long-low"
  /** Clocks given after SDA was held. `count`: which clock SDA came free on, 0 where it did not. */
  | "recovery"
  /** Volts: a level outside what a driver or pull-up must reach. */
  | "low-swing"
  /** Volts: SDA was still rising when SCL had risen. */
  | "slow-rise"
  /** Volts: zeros of one read byte stand at two levels. */
  | "two-levels"
  /** SDA went high and low again within one SCL low, between two zeros of one byte. `count`: SCL pulses before it. */
  | "notch";

export interface Moment {
  readonly kind: MomentKind;
  readonly tick: number;
  /** Ticks. */
  readonly width: number;
  /** SCL pulses since START when it happened. */
  readonly pulse: number;
  readonly count: number;
  /** Volts, for the level kinds. */
  readonly volts: number;
  /** The address byte's R/W bit said read. */
  readonly read: boolean;
  /** When SDA last fell before it, and at which pulse. */
  readonly sdaFell: number;
}

const LONG_LOW_S = 25e-3;
/** How many usual bit times SDA must stay low under a high SCL to be held rather than slow. Common practice, no source. */
const HELD_BITS = 20;
/** The same between a START and its first clock, where firmware may pause. */
const HELD_START_BITS = 50;
const LATE_BITS = 8;
const RUNT_SHARE = 0.4;
/** A pulse within one SCL high is shorter than this share of a bit time. */
const PULSE_SHARE = 0.5;
const OUTSIDE_KEPT = 1000;
/** Pulses of a bus clear (UM10204 3.1.16). */
const CLEAR_PULSES = 9;
/** Levels: VOL 0.4 V above 2 V supply, else 0.2 VDD (UM10204 Table 10); a high under this share of VDD is short of its swing. */
const HIGH_SHARE = 0.8;
const LEVEL_SLACK = 0.01;
/** Two levels of one byte's zeros differ by at least this much of VDD and in volts. */
const TWO_LEVELS_SHARE = 0.03;
const TWO_LEVELS_V = 0.06;

export class Moments {
  /** Usual bit time, ticks; NaN before the first. */
  period = Number.NaN;
  readonly outside: Moment[] = [];
  private readonly byTransaction = new Map<number, Moment[]>();
  private readonly longLow: number;
  private readonly lowLimit: number;
  private readonly highLimit: number;
  private readonly levelGap: number;
  private transaction = -1;
  private open = false;
  private pulse = 0;
  private read = false;
  private lastHigh = Number.NaN;
  private sdaFell = Number.NaN;
  private lastValue = 1;
  /** The condition before this one, while no bit came between. */
  private conditionTick = Number.NaN;
  private conditionInByte = false;
  /** Clocks since SDA was held; -1 where it is not. */
  private clearing = -1;
  private freed = 0;
  private clearFrom = 0;
  private outsidePulses = 0;
  private outsideZeros = 0;
  private levels = new Float64Array(8);
  private levelCount = 0;

  constructor(
    head: Pick<CaptureHead, "timebase" | "vdd_v">,
    private readonly findings: Pick<Findings, "harmless">,
  ) {
    this.longLow = head.timebase.origin === "assumed" ? Number.POSITIVE_INFINITY : ticks(LONG_LOW_S, head.timebase);
    const vdd = head.vdd_v ?? Number.NaN;
    this.lowLimit = (vdd > 2 ? 0.4 : 0.2 * vdd) + LEVEL_SLACK * vdd;
    this.highLimit = HIGH_SHARE * vdd;
    this.levelGap = Math.max(TWO_LEVELS_V, TWO_LEVELS_SHARE * vdd);
  }

  /** Moments of a transaction, once. */
  take(transaction: number): readonly Moment[] {
    const found = this.byTransaction.get(transaction);
    if (found === undefined) return NOTHING;
    this.byTransaction.delete(transaction);
    return found;
  }

  get lastTransaction(): number {
    return this.transaction;
  }

  get pulses(): number {
    return this.pulse;
  }

  /** SCL pulses of the byte so far, 0 to 8; -1 where no transaction is open or none of its bits has come. */
  get slot(): number {
    return this.open && this.pulse > 0 ? this.pulse % 9 : -1;
  }

  bits(block: BitBlock): void {
    const { kind, length } = block;
    for (let i = 0; i < length; i++) {
      const k = kind[i];
      if (k === BIT) i = this.calm(block, i) - 1;
      else if (k === LOST) this.lost();
      else this.condition(block, i, k);
    }
  }

  // The many: bits in which nothing happens. Does what `bit` does, from locals alone; hands `bit` the first that is not calm.
  private calm(block: BitBlock, from: number): number {
    const { kind, flags, value, length, fall, tick, end, sdaFirst, sdaLast } = block;
    if (block.leads !== null || this.clearing >= 0) {
      this.bit(block, from);
      return from + 1;
    }
    let { period, lastHigh, pulse, read, sdaFell } = this;
    let i = from;
    for (; i < length && kind[i] === BIT; i++) {
      const rose = tick[i];
      const high = end[i] - rose;
      const whole = end[i] - fall[i];
      const calm = high <= HELD_BITS * period && high >= RUNT_SHARE * lastHigh && rose - fall[i] < this.longLow;
      if (!calm || (flags[i] & OUTSIDE) !== 0) break;
      if (value[i] === 0 && !Number.isNaN(sdaLast[i])) sdaFell = sdaLast[i];
      if (pulse === 7) read = value[i] === 1;
      pulse++;
      lastHigh = high;
      period *= whole > period ? 1.02 : 1 / 1.02;
    }
    this.period = period;
    this.lastHigh = lastHigh;
    this.pulse = pulse;
    this.read = read;
    this.sdaFell = sdaFell;
    // A loop of its own: a call inside the one above would cost every bit.
    for (let k = from; k < i; k++) if (sdaFirst[k] < sdaLast[k]) this.twice(block, k, pulse - i + k);
    if (i > from) {
      this.conditionTick = Number.NaN;
      this.lastValue = value[i - 1];
    }
    if (i < length && kind[i] === BIT) {
      this.bit(block, i);
      return i + 1;
    }
    return i;
  }

  private bit(block: BitBlock, i: number): void {
    const fall = block.fall[i];
    const rise = block.tick[i];
    const end = block.end[i];
    const value = block.value[i];
    const outside = (block.flags[i] & OUTSIDE) !== 0;
    if (rise - fall >= this.longLow) this.note("long-low", fall, rise - fall);
    const last = block.sdaLast[i];
    if (!outside && block.sdaFirst[i] < last) this.twice(block, i, this.pulse);
    if (value === 0 && !Number.isNaN(last)) this.sdaFell = last;
    if (outside) this.outsideBit(value, rise);
    else {
      if (this.pulse === 7) this.read = value === 1;
      this.pulse++;
    }
    if (this.clearing >= 0) this.clearingBit(value);
    this.conditionTick = Number.NaN;
    this.lastValue = value;
    const high = end - rise;
    if (high > HELD_BITS * this.period && value === 0) this.held(rise, high);
    else if (high < RUNT_SHARE * this.lastHigh) this.note("runt", rise, high);
    else this.lastHigh = high;
    const period = end - fall;
    if (period > 0) this.learn(period);
    if (block.leads !== null) this.volts(block, i, value);
  }

  // SDA changed more than once in the low before this bit: lawful, whoever did it. `pulse` counts the pulses before this one.
  private twice(block: BitBlock, i: number, pulse: number): void {
    const slot = pulse % 9;
    const first = block.sdaFirst[i];
    const handover = pulse > 0 && (slot === 0 || slot === 8);
    this.findings.harmless(handover ? "ack-handover" : "low-pulse", first, this.transaction);
    if (handover || pulse === 0) return;
    const before = i > 0 ? block.value[i - 1] : this.lastValue;
    if (before === 0 && block.value[i] === 0) this.note("notch", first, block.sdaLast[i] - first, pulse);
  }

  // A median that follows: up a little when the period is longer, down a little when it is shorter.
  private learn(period: number): void {
    if (Number.isNaN(this.period)) this.period = period;
    else this.period *= period > this.period ? 1.02 : 1 / 1.02;
  }

  private held(tick: number, width: number): void {
    this.note("held-sda", tick, width);
    this.clearing = 0;
    this.freed = 0;
    this.clearFrom = tick + width;
  }

  private clearingBit(value: number): void {
    this.clearing++;
    if (value === 1 && this.freed === 0) this.freed = this.clearing;
    if (this.clearing >= CLEAR_PULSES) this.endClearing();
  }

  private endClearing(): void {
    if (this.clearing > 0) this.note("recovery", this.clearFrom, 0, this.freed);
    this.clearing = -1;
  }

  // Clocks without a START: a transaction that began before the record, or a bus clear.
  private outsideBit(value: number, rise: number): void {
    if (this.outsidePulses === 0) this.clearFrom = rise;
    this.outsidePulses++;
    if (value === 0) this.outsideZeros++;
  }

  private endOutside(): void {
    const { outsidePulses: n, outsideZeros: zeros } = this;
    this.outsidePulses = 0;
    this.outsideZeros = 0;
    // Zeros until SDA comes free, then a condition at once; or nine and more clocks on a free bus.
    const freedAtEnd = zeros >= n - 1 && zeros > 0;
    if (n >= CLEAR_PULSES && (freedAtEnd || zeros === 0)) this.note("recovery", this.clearFrom, 0, zeros < n ? zeros + 1 : 0);
  }

  private condition(block: BitBlock, i: number, kind: number): void {
    const tick = block.tick[i];
    const stop = kind === STOP;
    if (kind !== START && block.rise[i] - block.fall[i] >= this.longLow)
      this.note("long-low", block.fall[i], block.rise[i] - block.fall[i]);
    const sinceCondition = tick - this.conditionTick;
    const inByte = this.open && this.pulse % 9 !== 0;
    if (sinceCondition < PULSE_SHARE * this.period && this.conditionInByte) {
      // The transaction that the first of the two conditions broke.
      this.note("pulse", this.conditionTick, sinceCondition, 0, stop ? this.transaction - 1 : this.transaction);
    }
    this.conditionTick = tick;
    this.conditionInByte = inByte;
    if (this.outsidePulses > 0) this.endOutside();
    if (this.clearing >= 0) this.endClearing();
    if (!stop && kind !== START && tick - block.rise[i] > LATE_BITS * this.period) {
      this.note("late-start", block.rise[i], tick - block.rise[i]);
    }
    if (block.leads !== null) {
      const lead = block.leads.sdaLast[i];
      if (stop && lead > 0 && tick - lead < block.rise[i]) this.note("slow-rise", tick - lead, lead);
    }
    this.endLevels(tick);
    this.open = !stop;
    if (stop) return;
    this.sdaFell = tick;
    this.transaction++;
    this.pulse = 0;
    this.read = false;
    this.lastHigh = Number.NaN;
    if (block.end[i] - tick > HELD_START_BITS * this.period) this.held(tick, block.end[i] - tick);
  }

  private lost(): void {
    if (this.clearing >= 0) this.endClearing();
    if (this.outsidePulses > 0) this.endOutside();
    this.endLevels(Number.NaN);
    this.open = false;
    this.conditionTick = Number.NaN;
  }

  private volts(block: BitBlock, i: number, value: number): void {
    const { leads } = block;
    if (leads === null) return;
    const scl = leads.sclLow[i];
    const sda = leads.sdaHigh[i];
    if (scl > this.lowLimit) this.once("low-swing", block.fall[i], scl);
    if (value === 0 ? sda > this.lowLimit : sda < this.highLimit) this.once("low-swing", block.tick[i], sda);
    if (!this.read || this.pulse <= 9 || value !== 0 || Number.isNaN(sda)) return;
    // Data slots of a read only: the ninth is the controller's.
    if (this.pulse % 9 === 0) this.endLevels(block.tick[i]);
    else if (this.levelCount < this.levels.length) this.levels[this.levelCount++] = sda;
  }

  private endLevels(tick: number): void {
    const n = this.levelCount;
    this.levelCount = 0;
    if (n < 4) return;
    const sorted = this.levels.slice(0, n).sort();
    for (let k = 2; k <= n - 2; k++) {
      const within = Math.max(sorted[k - 1] - sorted[0], sorted[n - 1] - sorted[k]);
      if (sorted[k] - sorted[k - 1] > Math.max(this.levelGap, 3 * within)) {
        this.once("two-levels", tick, sorted[k] - sorted[k - 1]);
        return;
      }
    }
  }

  private once(kind: MomentKind, tick: number, volts: number): void {
    const found = this.byTransaction.get(this.transaction);
    if (this.open && found?.some((moment) => moment.kind === kind)) return;
    this.note(kind, tick, 0, 0, this.transaction, volts);
  }

  private note(
    kind: MomentKind,
    tick: number,
    width: number,
    count = 0,
    transaction = this.transaction,
    volts = Number.NaN,
  ): void {
    const moment = { kind, tick, width, count, volts, pulse: this.pulse, read: this.read, sdaFell: this.sdaFell };
    if (!this.open && kind !== "pulse") {
      if (this.outside.length < OUTSIDE_KEPT) this.outside.push(moment);
      return;
    }
    const found = this.byTransaction.get(transaction);
    if (found === undefined) this.byTransaction.set(transaction, [moment]);
    else found.push(moment);
  }
}

const NOTHING: readonly Moment[] = [];
