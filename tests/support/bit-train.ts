// Bits with chosen intervals, entry by entry, as the decoder would hand them on. For tests of the measurement.

import { BIT, type BitBlock, IN_HS, REPEATED_START, START, STOP } from "@/lib/engine/bits/bits";

/** Ticks. */
export interface Intervals {
  low: number;
  high: number;
  hdSta: number;
  suSta: number;
  suSto: number;
  buf: number;
  hold: number;
  valid: number;
}

interface Entry {
  kind: number;
  value: number;
  flags: number;
  tick: number;
  fall: number;
  rise: number;
  end: number;
  sdaFirst: number;
  sdaLast: number;
  leads: { fall: number; rise: number; end: number; sdaLast: number };
}

const NONE = Number.NaN;

export class BitTrain {
  private readonly entries: Entry[] = [];
  private fall = 0;
  private at = 0;
  hs = false;

  constructor(
    readonly usual: Intervals,
    from = 0,
  ) {
    this.at = from;
  }

  start(change: Partial<Intervals> = {}): this {
    const { hdSta } = { ...this.usual, ...change };
    this.put({ kind: START, tick: this.at, end: this.at + hdSta });
    this.fall = this.at + hdSta;
    return this;
  }

  bit(value: 0 | 1, change: Partial<Intervals> = {}, leads: Partial<Entry["leads"]> = {}): this {
    const { low, high, hold, valid } = { ...this.usual, ...change };
    const { fall } = this;
    const rise = fall + low;
    const end = rise + high;
    this.put({ kind: BIT, value, tick: rise, fall, rise, end, sdaFirst: fall + hold, sdaLast: fall + valid }, leads);
    this.fall = end;
    return this;
  }

  /** Nine bits, of which `change` holds for the one at `nth`. */
  byte(change: Partial<Intervals> = {}, nth = -1): this {
    for (let slot = 0; slot < 9; slot++) this.bit((slot & 1) as 0 | 1, slot === nth ? change : {});
    return this;
  }

  repeated(change: Partial<Intervals> = {}): this {
    const { low, suSta, hdSta } = { ...this.usual, ...change };
    const rise = this.fall + low;
    const tick = rise + suSta;
    this.put({ kind: REPEATED_START, tick, fall: this.fall, rise, end: tick + hdSta });
    this.fall = tick + hdSta;
    return this;
  }

  stop(change: Partial<Intervals> = {}): this {
    const { low, suSto, buf } = { ...this.usual, ...change };
    const rise = this.fall + low;
    const tick = rise + suSto;
    this.put({ kind: STOP, tick, fall: this.fall, rise });
    this.at = tick + buf;
    return this;
  }

  block(volts = false): BitBlock {
    const n = this.entries.length;
    const column = (key: "tick" | "fall" | "rise" | "end" | "sdaFirst" | "sdaLast") =>
      Float64Array.from(this.entries, (e) => e[key]);
    const lead = (key: keyof Entry["leads"]) => Float32Array.from(this.entries, (e) => e.leads[key]);
    return {
      length: n,
      kind: Uint8Array.from(this.entries, (e) => e.kind),
      value: Uint8Array.from(this.entries, (e) => e.value),
      flags: Uint8Array.from(this.entries, (e) => e.flags),
      tick: column("tick"),
      fall: column("fall"),
      rise: column("rise"),
      end: column("end"),
      sdaFirst: column("sdaFirst"),
      sdaLast: column("sdaLast"),
      edge: new Float64Array(n),
      leads: volts
        ? {
            fall: lead("fall"),
            rise: lead("rise"),
            end: lead("end"),
            sdaFirst: new Float32Array(n),
            sdaLast: lead("sdaLast"),
            sdaHigh: new Float32Array(n).fill(NONE),
            sclLow: new Float32Array(n).fill(NONE),
          }
        : null,
    };
  }

  private put(entry: Partial<Entry>, leads: Partial<Entry["leads"]> = {}): void {
    const blank = { kind: BIT, value: 0, flags: 0, tick: 0, fall: NONE, rise: NONE, end: NONE, sdaFirst: NONE, sdaLast: NONE };
    this.entries.push({
      ...blank,
      flags: this.hs ? IN_HS : 0,
      ...entry,
      leads: { fall: 0, rise: 0, end: 0, sdaLast: 0, ...leads },
    });
  }
}
