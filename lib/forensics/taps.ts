// In: what some controllers themselves drove. Out: who took part in each message and where each let go of SDA although it had
// not finished: certain, whatever the bus shows. UM10204 3.1.8: it puts a 1 and sees a 0 while SCL is high.

import { CUT, type EdgeBlock, SCL, SDA } from "../engine/samples/edges";
import type { Ledger } from "./ledger";
import { BUS_STOP, type Messages, newSlots, readMessage, type Slots } from "./message";

/** Levels of one tap over time: bit set = released. */
export class TapTrace {
  private ticks = new Float64Array(1024);
  private lines = new Uint8Array(1024);
  private count = 0;

  constructor(
    readonly label: string,
    readonly hasScl: boolean,
    readonly hasSda: boolean,
  ) {}

  push(block: EdgeBlock): void {
    if (this.count + block.length > this.ticks.length) {
      const room = Math.max(this.count + block.length, 2 * this.ticks.length);
      const ticks = new Float64Array(room);
      const lines = new Uint8Array(room);
      ticks.set(this.ticks.subarray(0, this.count));
      lines.set(this.lines.subarray(0, this.count));
      this.ticks = ticks;
      this.lines = lines;
    }
    this.ticks.set(block.ticks.subarray(0, block.length), this.count);
    for (let i = 0; i < block.length; i++) this.lines[this.count + i] = block.lines[i] & ~CUT;
    this.count += block.length;
  }

  get used(): boolean {
    return this.count > 0;
  }

  /** Index of the last change at or before `tick`, -1 before the first. */
  private at(tick: number): number {
    let low = 0;
    let high = this.count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.ticks[middle] <= tick) low = middle + 1;
      else high = middle;
    }
    return low - 1;
  }

  pulls(line: typeof SCL | typeof SDA, tick: number): boolean {
    const i = this.at(tick);
    return i >= 0 && (this.lines[i] & line) === 0;
  }

  /** When it last let go of the line, at or before `tick`; NaN where it has not, or pulls. */
  releasedAt(line: typeof SCL | typeof SDA, tick: number): number {
    let i = this.at(tick);
    if (i < 0 || (this.lines[i] & line) === 0) return Number.NaN;
    while (i > 0 && (this.lines[i - 1] & line) !== 0) i--;
    return this.ticks[i];
  }

  /** Whether it pulled the line at any moment of a span. */
  pulledWithin(line: typeof SCL | typeof SDA, from: number, to: number): boolean {
    let i = this.at(from);
    if (i < 0) i = 0;
    for (; i < this.count && this.ticks[i] <= to; i++) if ((this.lines[i] & line) === 0) return true;
    return false;
  }
}

export interface TapLoss {
  readonly message: number;
  readonly tap: number;
  readonly slot: number;
}

export interface TapFindings {
  /** Tap that was in the message to its end (index), or -1. */
  readonly owner: Int16Array;
  /** 1: every controller that drove there is tapped or nothing untapped drove (all of START seen on taps). */
  readonly joined: Uint8Array;
  readonly losses: readonly TapLoss[];
  /** Pulses of the message in which SCL fell before its owner pulled it: only another controller ends a HIGH. */
  readonly foreign: Uint16Array;
  /** The same for all taps together: marks of a controller that has none. A START that no tap began counts two. */
  readonly unseen: Uint16Array;
  /** Last slot whose low no tap began; 0 where there is none. */
  readonly unseenUntil: Uint16Array;
}

/** `slack`: how much later than the line itself a tap may show the same edge (sampling; interpolated crossings of a line in volts). */
export function readTaps(
  ledger: Ledger,
  messages: Messages,
  taps: readonly TapTrace[],
  step: number,
  slack: number,
): TapFindings {
  const owner = new Int16Array(messages.count).fill(-1);
  const joined = new Uint8Array(messages.count);
  const losses: TapLoss[] = [];
  const foreign = new Uint16Array(messages.count);
  const unseen = new Uint16Array(messages.count);
  const unseenUntil = new Uint16Array(messages.count);
  const lags: Lag[][] = taps.map(() => []);
  const slots = newSlots();
  for (let m = 0; m < messages.count; m++) {
    const t = messages.first[m];
    const start = ledger.openTick[t];
    const hold = ledger.hold[t];
    if (Number.isNaN(hold)) continue;
    readMessage(ledger, messages, m, slots, 4096);
    const entrants: number[] = [];
    taps.forEach((tap, i) => {
      // It pulls SDA when SCL first falls, and pulls SCL in the low that follows: a controller that took part in the START.
      const sda = !tap.hasSda || tap.pulls(SDA, start + hold - step / 2);
      const scl =
        !tap.hasScl || tap.pulledWithin(SCL, start + hold - step, start + hold + (ledger.low[ledger.openEntry[t] + 1] || 0) / 2);
      if (tap.used && sda && scl && (tap.hasSda || tap.hasScl)) entrants.push(i);
    });
    joined[m] = entrants.length;
    for (const i of entrants) {
      const slot = lossSlot(ledger, slots, taps[i], step);
      if (slot < 0) {
        owner[m] = i;
        if (taps[i].hasScl) {
          foreign[m] = foreignPulls(ledger, slots, taps[i], slack);
          lags[i].push(...lagsOf(ledger, slots, taps[i], m));
        }
        // SDA fell for the START before this one pulled it.
        if (taps[i].hasSda && !taps[i].pulls(SDA, start + slack)) foreign[m] += 2;
      } else losses.push({ message: m, tap: i, slot });
    }
    if (owner[m] < 0) continue;
    const marks = untapped(ledger, slots, taps, slack);
    unseen[m] = marks.count;
    unseenUntil[m] = marks.until;
  }
  for (const list of lags) {
    const usual = list.map((l) => l.lag).sort((a, b) => a - b)[list.length >> 1];
    // In the address byte nobody but a controller holds SCL after the owner let go.
    for (const l of list) if (l.lag - usual > Math.max(2.5 * step, 0.03 * l.low)) foreign[l.message]++;
  }
  return { owner, joined, losses, foreign, unseen, unseenUntil };
}

/** Edges of the bus that only a controller makes, and that no tap made. */
function untapped(ledger: Ledger, slots: Slots, taps: readonly TapTrace[], slack: number): { count: number; until: number } {
  const scl = taps.filter((tap) => tap.used && tap.hasScl);
  const sda = taps.filter((tap) => tap.used && tap.hasSda);
  // A tap without one of its lines cannot show who moved that line.
  const whole = (list: readonly TapTrace[]): boolean => list.length > 0 && list.length === taps.length;
  const start = ledger.openTick[slots.transaction[0]];
  let count = whole(sda) && !sda.some((tap) => tap.pulls(SDA, start + slack)) ? 2 : 0;
  let until = 0;
  if (!whole(scl)) return { count, until };
  let at = start + (ledger.hold[slots.transaction[0]] || 0);
  // Later STARTs of the message follow a set-up time that only their own controller counts.
  for (let s = 0; s < slots.length && slots.transaction[s] === slots.transaction[0]; s++) {
    if (!scl.some((tap) => tap.pulls(SCL, at + slack))) {
      count++;
      until = s;
    }
    at += ledger.low[slots.entry[s]] + (ledger.high[slots.entry[s]] || 0);
  }
  return { count, until };
}

interface Lag {
  readonly message: number;
  readonly low: number;
  /** From the owner letting go of SCL to SCL rising. */
  readonly lag: number;
}

/** Lags of the lows inside the address byte. */
function lagsOf(ledger: Ledger, slots: Slots, tap: TapTrace, message: number): Lag[] {
  const out: Lag[] = [];
  const first = slots.transaction[0];
  let at = ledger.openTick[first] + (ledger.hold[first] || 0);
  for (let s = 0; s < Math.min(8, slots.length) && slots.transaction[s] === first; s++) {
    const low = ledger.low[slots.entry[s]];
    const released = tap.releasedAt(SCL, at + low);
    if (released > at && released <= at + low) out.push({ message, low, lag: at + low - released });
    at += low + (ledger.high[slots.entry[s]] || 0);
  }
  return out;
}

function foreignPulls(ledger: Ledger, slots: Slots, tap: TapTrace, slack: number): number {
  let count = 0;
  let at = 0;
  let transaction = -1;
  for (let s = 0; s < slots.length; s++) {
    if (slots.transaction[s] !== transaction) {
      transaction = slots.transaction[s];
      at = ledger.openTick[transaction] + (ledger.hold[transaction] || 0);
    } else if (!tap.pulls(SCL, at + slack)) count++;
    at += ledger.low[slots.entry[s]] + (ledger.high[slots.entry[s]] || 0);
  }
  return count;
}

/**
 * Who has lost never pulls SDA again in that message, and another goes on to the STOP. If either fails it was something else: an
 * extra clock that shifted the places in the byte, or a target that held SDA while nobody else was there.
 */
function isLoss(ledger: Ledger, slots: Slots, s: number, tap: TapTrace, from: number): boolean {
  if (slots.bus[slots.length - 1] !== BUS_STOP) return false;
  let end = from;
  for (let r = s; r < slots.length; r++) end += (ledger.low[slots.entry[r]] || 0) + (ledger.high[slots.entry[r]] || 0);
  const last = slots.entry[slots.length - 1];
  return !tap.pulledWithin(SDA, from, end - ledger.low[slots.entry[s]] - ledger.high[slots.entry[s]] / 2 - ledger.high[last] / 2);
}

/** First slot of its own in which the tap lets SDA go while the bus is low; -1 if it drove everything that was driven. */
function lossSlot(ledger: Ledger, slots: Slots, tap: TapTrace, step: number): number {
  let at = 0;
  let transaction = -1;
  for (let s = 0; s < slots.length; s++) {
    const t = slots.transaction[s];
    if (t !== transaction) {
      transaction = t;
      at = ledger.openTick[t] + (ledger.hold[t] || 0);
    }
    const e = slots.entry[s];
    const rise = at + ledger.low[e];
    const high = ledger.high[e] || 0;
    const middle = rise + Math.min(high / 2, Math.max(high - 2 * step, 0));
    if (slots.own[s] === 1 && tap.hasSda) {
      const gone = slots.bus[s] === BUS_STOP ? !tap.pulls(SDA, rise) : slots.bus[s] === 0 && !tap.pulls(SDA, middle);
      if (gone) return isLoss(ledger, slots, s, tap, middle) ? s : -1;
    } else if (!tap.hasSda && !tap.pulledWithin(SCL, at, rise)) return Math.max(0, s - 1);
    at = rise + high;
  }
  return -1;
}
