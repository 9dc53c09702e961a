// In: the ledger. Out: messages (START to STOP, repeated STARTs included) and, pulse by pulse, who is entitled to drive SDA and
// which habit of its controller each interval belongs to. UM10204 3.1.5, 3.1.6, 3.1.10.

import { REPEATED_START, STOP } from "../engine/bits/bits";
import { KIND, type Ledger, NO_ARBITRATION, VALUE } from "./ledger";

/** Habits of a low: before the first bit, inside a byte, before the ninth bit, before a next byte, before Sr, before STOP. */
export const LOW_FIRST = 0;
export const LOW_IN = 1;
export const LOW_NINTH = 2;
export const LOW_NEXT = 3;
export const LOW_SR = 4;
export const LOW_STOP = 5;
/** Habits of a high: of data bits, of the ninth bit; set-up of Sr and STOP. */
export const HIGH_IN = 6;
export const HIGH_NINTH = 7;
export const SETUP_SR = 8;
export const SETUP_STOP = 9;
export const HOLD_START = 10;
export const HOLD_SR = 11;
/** SCL fall to SDA fall and to SDA rise, in bits its controller drives. */
export const DATA_FALL = 12;
export const DATA_RISE = 13;
export const HABITS = 14;

/** Index of messages over transactions. */
export interface Messages {
  readonly count: number;
  /** First transaction of each message; entry `count` holds the number of transactions. */
  readonly first: Uint32Array;
  /** Message of each transaction. */
  readonly of: Uint32Array;
}

export function messagesOf(ledger: Ledger): Messages {
  const n = ledger.transactions;
  const first = new Uint32Array(n + 1);
  const of = new Uint32Array(n);
  let count = 0;
  for (let t = 0; t < n; t++) {
    const kind = ledger.what[ledger.openEntry[t]] & KIND;
    if (t === 0 || kind !== REPEATED_START) first[count++] = t;
    of[t] = count - 1;
  }
  first[count] = n;
  return { count, first: first.slice(0, count + 1), of };
}

/** One SCL pulse, or the high of a Sr or STOP, of one message. */
export interface Slots {
  length: number;
  entry: Uint32Array;
  transaction: Uint32Array;
  /** Pulse within its transaction; for Sr and STOP the number of pulses before. */
  pulse: Uint32Array;
  /** 0 or 1 on the bus; 2 Sr; 3 STOP; 4 broken off. */
  bus: Uint8Array;
  /** 1 where the controller itself drives SDA and so takes part in arbitration. */
  own: Uint8Array;
  lowHabit: Uint8Array;
  highHabit: Uint8Array;
  /** DATA_FALL or DATA_RISE where SDA moved once, by the controller's own hand, else 0. */
  dataHabit: Uint8Array;
}

export const BUS_SR = 2;
export const BUS_STOP = 3;
export const BUS_BROKEN = 4;

export function newSlots(): Slots {
  const n = 256;
  return {
    length: 0,
    entry: new Uint32Array(n),
    transaction: new Uint32Array(n),
    pulse: new Uint32Array(n),
    bus: new Uint8Array(n),
    own: new Uint8Array(n),
    lowHabit: new Uint8Array(n),
    highHabit: new Uint8Array(n),
    dataHabit: new Uint8Array(n),
  };
}

function reserve(slots: Slots, size: number): void {
  if (size <= slots.entry.length) return;
  const room = Math.max(size, 2 * slots.entry.length);
  const u32 = (a: Uint32Array): Uint32Array => {
    const b = new Uint32Array(room);
    b.set(a);
    return b;
  };
  const u8 = (a: Uint8Array): Uint8Array => {
    const b = new Uint8Array(room);
    b.set(a);
    return b;
  };
  slots.entry = u32(slots.entry);
  slots.transaction = u32(slots.transaction);
  slots.pulse = u32(slots.pulse);
  slots.bus = u8(slots.bus);
  slots.own = u8(slots.own);
  slots.lowHabit = u8(slots.lowHabit);
  slots.highHabit = u8(slots.highHabit);
  slots.dataHabit = u8(slots.dataHabit);
}

/** Fills `slots` with message `m`, at most `limit` slots (contests beyond are not looked for). */
export function readMessage(ledger: Ledger, messages: Messages, m: number, slots: Slots, limit: number): void {
  slots.length = 0;
  for (let t = messages.first[m]; t < messages.first[m + 1] && slots.length < limit; t++)
    readTransaction(ledger, t, slots, limit);
}

function readTransaction(ledger: Ledger, t: number, slots: Slots, limit: number): void {
  const base = ledger.openEntry[t] + 1;
  const pulses = Math.min(ledger.pulses(t), limit - slots.length);
  reserve(slots, slots.length + pulses + 1);
  const { what } = ledger;
  const read = pulses > 7 && (what[base + 7] & VALUE) !== 0;
  let previousOwn = 1;
  let previous = 0;
  let n = slots.length;
  let bit = 0;
  for (let p = 0; p < pulses; p++) {
    const e = base + p;
    const value = (what[e] & VALUE) === 0 ? 0 : 1;
    const own = (what[e] & NO_ARBITRATION) !== 0 ? 0 : bit === 8 ? (read && p > 8 ? 1 : 0) : !read || p < 8 ? 1 : 0;
    slots.entry[n] = e;
    slots.transaction[n] = t;
    slots.pulse[n] = p;
    slots.bus[n] = value;
    slots.own[n] = own;
    slots.lowHabit[n] = p === 0 ? LOW_FIRST : bit === 0 ? LOW_NEXT : bit === 8 ? LOW_NINTH : LOW_IN;
    slots.highHabit[n] = bit === 8 ? HIGH_NINTH : HIGH_IN;
    const moved = own === 1 && previousOwn === 1 && value !== previous && ledger.movedOnce(e);
    slots.dataHabit[n] = moved ? (value === 0 ? DATA_FALL : DATA_RISE) : 0;
    previousOwn = own;
    previous = value;
    bit = bit === 8 ? 0 : bit + 1;
    n++;
  }
  const close = ledger.closeEntry[t];
  const kind = close < ledger.count ? what[close] & KIND : -1;
  if (pulses === ledger.pulses(t) && (kind === STOP || kind === REPEATED_START)) {
    slots.entry[n] = close;
    slots.transaction[n] = t;
    slots.pulse[n] = pulses;
    slots.bus[n] = kind === STOP ? BUS_STOP : BUS_SR;
    slots.own[n] = 1;
    slots.lowHabit[n] = kind === STOP ? LOW_STOP : LOW_SR;
    slots.highHabit[n] = kind === STOP ? SETUP_STOP : SETUP_SR;
    slots.dataHabit[n] = 0;
    n++;
  }
  slots.length = n;
}
