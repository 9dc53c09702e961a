// In: two line traces, one taken as SCL and one as SDA. Out: what that ordering decodes to, counted. A deliberately small
// decoder (UM10204 3.1.3 - 3.1.6: conditions, bits at SCL high, nine pulses a byte) that only has to tell a right ordering
// from a wrong one; the real decoding is done elsewhere.

import type { LineTrace, PairPreview } from "./trace";

/** Counts over the span both traces cover. */
export interface PairCount {
  /** START and repeated START conditions. */
  transactions: number;
  wholeBytes: number;
  acked: number;
  /** Conditions inside a byte. */
  breaks: number;
  /** START, repeated START and STOP conditions. */
  conditions: number;
  /** SDA changes while SCL is low or in the tick of an SCL change: what a bit stream consists of. */
  dataChanges: number;
  /** SCL pulses, and those of them outside any transaction. */
  pulses: number;
  idlePulses: number;
  firstBytes: string;
}

const TEXT_ITEMS = 14;
/** More changes of one line than this say nothing new about the ordering. */
const CHANGES = 20_000;
/** Ordering given up: this many breaks, and four times as many as whole bytes. */
const HOPELESS_BREAKS = 24;

/** Follows two lines taken as SCL and SDA, one call per instant. */
class Walk {
  readonly count: PairCount = {
    transactions: 0,
    wholeBytes: 0,
    acked: 0,
    breaks: 0,
    conditions: 0,
    dataChanges: 0,
    pulses: 0,
    idlePulses: 0,
    firstBytes: "",
  };
  private readonly text: string[] = [];
  private open = false;
  private bits = 0;
  private value = 0;
  /** Bit seen at the latest SCL rise; it counts once SCL falls without a condition in between. -1: none. */
  private pending = -1;

  constructor(
    private scl: number,
    private sda: number,
  ) {}

  step(scl: number, sda: number): void {
    const wasScl = this.scl;
    const wasSda = this.sda;
    this.scl = scl;
    this.sda = sda;
    if (scl === 2 || sda === 2 || wasScl === 2 || wasSda === 2) {
      this.lose();
    } else if (wasScl === scl) {
      if (scl === 1) this.condition(sda === 0);
      else this.count.dataChanges++;
    } else {
      if (wasSda !== sda) this.count.dataChanges++;
      if (scl === 1) this.rise(sda);
      else this.fall();
    }
  }

  finish(): PairCount {
    if (this.open && this.pending >= 0) this.commit();
    this.count.firstBytes = this.text.join(" ");
    return this.count;
  }

  private lose(): void {
    this.open = false;
    this.bits = 0;
    this.pending = -1;
  }

  private condition(isStart: boolean): void {
    const { count } = this;
    if (isStart || this.open) count.conditions++;
    if (this.open && this.bits > 0) {
      count.breaks++;
      this.say(`(${this.bits} bits)`);
    }
    if (isStart) {
      count.transactions++;
      this.say(this.open ? "Sr" : "S");
    } else if (this.open) this.say("P");
    this.open = isStart;
    this.bits = 0;
    this.value = 0;
    this.pending = -1;
  }

  private rise(sda: number): void {
    this.count.pulses++;
    if (this.open) this.pending = sda;
    else this.count.idlePulses++;
  }

  private fall(): void {
    if (this.pending >= 0) this.commit();
  }

  private commit(): void {
    if (this.bits === 8) {
      this.count.wholeBytes++;
      if (this.pending === 0) this.count.acked++;
      this.say(`${this.value.toString(16).toUpperCase().padStart(2, "0")} ${this.pending === 0 ? "A" : "N"}`);
      this.bits = 0;
      this.value = 0;
    } else {
      this.value = this.value * 2 + this.pending;
      this.bits++;
    }
    this.pending = -1;
  }

  private say(item: string): void {
    if (this.text.length < TEXT_ITEMS) this.text.push(item);
  }
}

/** Counts what the ordering (scl, sda) decodes to. Changes of both lines in one tick are one instant. */
export function countPair(scl: LineTrace, sda: LineTrace): PairCount {
  const until = Math.min(scl.until ?? Number.POSITIVE_INFINITY, sda.until ?? Number.POSITIVE_INFINITY);
  const walk = new Walk(scl.initial, sda.initial);
  const sclCount = Math.min(scl.length, CHANGES);
  const sdaCount = Math.min(sda.length, CHANGES);
  let i = 0;
  let j = 0;
  let sclLevel: number = scl.initial;
  let sdaLevel: number = sda.initial;
  while (i < sclCount || j < sdaCount) {
    const atScl = i < sclCount ? scl.ticks[i] : Number.POSITIVE_INFINITY;
    const atSda = j < sdaCount ? sda.ticks[j] : Number.POSITIVE_INFINITY;
    if (Math.min(atScl, atSda) > until) break;
    if (i === sclCount && scl.length > sclCount) break;
    if (j === sdaCount && sda.length > sdaCount) break;
    if (atScl <= atSda) sclLevel = scl.levels[i++];
    if (atSda <= atScl) sdaLevel = sda.levels[j++];
    walk.step(sclLevel, sdaLevel);
    if (hopeless(walk.count)) break;
  }
  return walk.finish();
}

/** Nothing but breaks, or a clock that runs with never a START. */
function hopeless({ breaks, wholeBytes, pulses, transactions }: PairCount): boolean {
  return (breaks > HOPELESS_BREAKS && breaks > 4 * wholeBytes) || (pulses > 1000 && transactions === 0);
}

/** Whole bytes beyond this many say nothing more. */
const ENOUGH = 32;

/** How well an ordering reads as a bus, 0 to 64; only for comparing orderings of one capture. */
export function worth(count: PairCount): number {
  // A free-running clock beside any slow line gives long runs of equal bits: bytes count only where data moved.
  const bytes = Math.min(count.wholeBytes, 2 * count.dataChanges + 1, ENOUGH);
  if (bytes <= 0) return 0;
  // Unrelated lines put eight of nine conditions inside a byte.
  const broken = count.breaks / count.conditions;
  const idle = count.idlePulses / count.pulses;
  return (bytes + Math.min(count.acked, bytes)) * Math.max(0, 1 - 2 * broken) * (1 - idle / 2);
}

/** Whether an ordering that names or the person suggest reads as a bus: more whole bytes than broken ones. */
export function convincing(count: PairCount): boolean {
  return count.wholeBytes > 0 && 2 * count.breaks <= count.wholeBytes + 1;
}

/** Whether an ordering reads as a bus with nothing else to support it: hardly a break, and data that moves between conditions. */
export function compelling(count: PairCount): boolean {
  return convincing(count) && worth(count) > 0 && 4 * count.dataChanges >= count.conditions;
}

/** A START and some bits of a first byte, nothing wrong so far: what a short survey may hold. */
export function beginning(count: PairCount): boolean {
  return count.transactions > 0 && count.breaks === 0 && count.pulses - count.idlePulses >= 3 && count.idlePulses === 0;
}

export function previewOf(scl: LineTrace, sda: LineTrace, count: PairCount): PairPreview {
  return {
    scl: scl.id,
    sda: sda.id,
    transactions: count.transactions,
    wholeBytes: count.wholeBytes,
    breaks: count.breaks,
    firstBytes: count.firstBytes,
  };
}
