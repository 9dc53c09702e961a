// A second decoder, slow and written from UM10204 Rev 7 3.1.3 - 3.1.14 alone, for comparison only. It looks at one SCL high
// at a time: what SDA did inside it says whether it was a bit or conditions. It shares no code with lib/engine.

import type { Instant } from "./wave";

export interface NaiveByte {
  value: number;
  bits: number;
  ack: boolean | null;
}

export interface NaiveTransaction {
  opens: "S" | "Sr";
  closes: "P" | "Sr" | "none";
  start: number;
  bytes: NaiveByte[];
}

type Word = { is: "bit"; value: number } | { is: "start"; tick: number } | { is: "stop" } | { is: "cut" };

interface High {
  from: number;
  to: number;
  /** SDA levels in force from the rise on, each with its tick; the first is the level at the rise. */
  sda: { tick: number; level: number }[];
  /** The high began before the record, or after an unknown. */
  headless: boolean;
  /** The record ended, or a line became unknown, before the fall. */
  endless: boolean;
}

function stretches(instants: readonly Instant[]): Instant[][] {
  const out: Instant[][] = [[]];
  for (const instant of instants) {
    if (instant.scl === 2 || instant.sda === 2) out.push([]);
    else out[out.length - 1].push(instant);
  }
  return out.filter((stretch) => stretch.length > 0);
}

function highs(stretch: readonly Instant[]): High[] {
  const out: High[] = [];
  let now: High | null = null;
  stretch.forEach((instant, i) => {
    if (instant.scl === 1 && now === null) {
      now = {
        from: instant.tick,
        to: Number.NaN,
        sda: [{ tick: instant.tick, level: instant.sda }],
        headless: i === 0,
        endless: true,
      };
      out.push(now);
    } else if (instant.scl === 1 && now !== null) {
      now.sda.push({ tick: instant.tick, level: instant.sda });
    } else if (instant.scl === 0 && now !== null) {
      now.to = instant.tick;
      now.endless = false;
      now = null;
    }
  });
  return out;
}

function words(stretch: readonly Instant[]): Word[] {
  const out: Word[] = [];
  for (const high of highs(stretch)) {
    const levels = high.sda.filter((s, i) => i === 0 || s.level !== high.sda[i - 1].level);
    for (const { tick, level } of levels.slice(1)) out.push(level === 0 ? { is: "start", tick } : { is: "stop" });
    if (levels.length === 1 && !high.headless)
      out.push(high.endless ? { is: "bit", value: levels[0].level + 2 } : { is: "bit", value: levels[0].level });
  }
  out.push({ is: "cut" });
  return out;
}

/** Bits of value 2 and 3 are a 0 and a 1 whose high the record ended in: readable inside a byte, perhaps a STOP's between two. */
export function naiveDecode(instants: readonly Instant[]): NaiveTransaction[] {
  const out: NaiveTransaction[] = [];
  for (const stretch of stretches(instants)) {
    let bits: number[] = [];
    let now: NaiveTransaction | null = null;
    let busy = stretch[0].scl === 0 || stretchBeginsInside(stretch);
    const settle = (closes: "P" | "Sr" | "none") => {
      if (now === null) return;
      now.closes = closes;
      now.bytes = toBytes(bits);
      out.push(now);
      now = null;
    };
    for (const word of words(stretch)) {
      if (word.is === "bit") {
        if (now !== null && (word.value < 2 || bits.length % 9 !== 0)) bits.push(word.value & 1);
      } else if (word.is === "start") {
        const again: boolean = now !== null || busy;
        settle("Sr");
        now = { opens: again ? "Sr" : "S", closes: "none", start: word.tick, bytes: [] };
        bits = [];
        busy = true;
      } else if (word.is === "stop") {
        settle("P");
        busy = false;
      } else {
        settle("none");
      }
    }
  }
  return out;
}

// SCL falls out of the first high without a condition before it: somebody was already clocking.
function stretchBeginsInside(stretch: readonly Instant[]): boolean {
  const first = highs(stretch)[0];
  if (first === undefined || !first.headless || first.endless) return false;
  return first.sda.every((s) => s.level === first.sda[0].level);
}

function toBytes(bits: readonly number[]): NaiveByte[] {
  const out: NaiveByte[] = [];
  for (let i = 0; i < bits.length; i += 9) {
    const group = bits.slice(i, i + 9);
    const data = group.slice(0, 8);
    out.push({ value: data.reduce((v, b) => v * 2 + b, 0), bits: data.length, ack: group.length === 9 ? group[8] === 0 : null });
  }
  return out;
}
