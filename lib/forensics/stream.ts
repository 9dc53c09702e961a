// In: messages. Out: what each would have put on SDA, slot by slot, and where two of them part. UM10204 3.1.8.

import { BUS_BROKEN, BUS_SR, BUS_STOP, type Slots } from "./message";

/** 0 and 1: driven by the controller. */
export const FROM_TARGET = 5;

/** Codes of a message's slots: 0, 1, BUS_SR, BUS_STOP, FROM_TARGET. */
export function streamOf(slots: Slots): Uint8Array {
  const out = new Uint8Array(slots.length);
  for (let s = 0; s < slots.length; s++) out[s] = slots.own[s] === 1 ? slots.bus[s] : FROM_TARGET;
  return out;
}

export interface Parting {
  /** Slot at which they part; the shorter length when they do not. */
  readonly at: number;
  /** loses: `other` yields to `bus` there; wins: it would have kept the bus instead; same: no difference, or not comparable. */
  readonly outcome: "loses" | "wins" | "same" | "undefined";
}

/** How a controller sending `other` fares against what stood on the bus. A repeated START lets SDA go like a 1, a STOP holds it like a 0. */
export function part(bus: Uint8Array, other: Uint8Array): Parting {
  const n = Math.min(bus.length, other.length);
  for (let s = 0; s < n; s++) {
    const a = bus[s];
    const b = other[s];
    if (a === b) {
      if (a === BUS_STOP || a === BUS_BROKEN) return { at: s, outcome: "same" };
      continue;
    }
    if (a === FROM_TARGET || b === FROM_TARGET) return { at: s, outcome: crossing(a, b) };
    const drivesA = a === 1 || a === BUS_SR ? 1 : 0;
    const drivesB = b === 1 || b === BUS_SR ? 1 : 0;
    if (drivesA < drivesB) return { at: s, outcome: "loses" };
    if (drivesA > drivesB) return { at: s, outcome: "wins" };
    // STOP against a data 0: whoever meant to stop sees the clock go on. Repeated START against a data 1 has no rule.
    if (b === BUS_STOP) return { at: s, outcome: "loses" };
    return { at: s, outcome: a === BUS_STOP ? "wins" : "undefined" };
  }
  return { at: n, outcome: "same" };
}

/** One expects the target to drive and the other drives or stops: after a NACK one of the two had already ended. */
function crossing(a: number, b: number): Parting["outcome"] {
  if (b === BUS_STOP || b === BUS_SR || a === BUS_STOP || a === BUS_SR) return "undefined";
  return "same";
}
