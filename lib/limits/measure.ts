// In: bits, block by block, and the profile to judge by (or the modes to try). Out: every interval of the specification's
// tables, in columns. Measuring points are those of REFERENCE 1.6 (UM10204 Figure 38); for a capture in volts each interval
// takes its own thresholds from the leads, for a one-threshold capture both points of an edge are the same instant.

import type { Timebase } from "../base/time";
import { BIT, type BitBlock, IN_HS, LOST, OUTSIDE, type Spike, START, STOP } from "../engine/bits/bits";
import type { CaptureHead } from "../engine/samples/reader";
import { ACK_SLOT, type Column } from "./column";
import { type ColumnSet, columnsFor, columnsOf } from "./columns";
import { type EdgePoints, edgePoints, THIRTY_TO_SEVENTY } from "./edges";
import { type LevelColumns, levelColumns, noteLevels } from "./levels";
import type { LimitTable, Profile } from "./profile";

export type MeasureHead = Pick<CaptureHead, "timebase" | "levels" | "sampleTicks"> &
  Partial<Pick<CaptureHead, "vdd_v" | "vil_v" | "vih_v">>;

/** Low periods longer than this many times the shortest one of their transaction are stretched, for tVD's purposes. */
const STRETCHED = 1.5;
/** From this many clock periods on, a mode that most of them are too fast for is no longer tried. */
const SETTLED = 20_000;
/** Bits that need more than the plain walk. */
const UNUSUAL = OUTSIDE | IN_HS;

export interface Measured {
  readonly base: Timebase;
  /** Standard, Fast and Fast-mode Plus traffic; judged by each of the profiles tried, in their order. */
  readonly fs: ColumnSet;
  /** Hs traffic, or null where there was none; judged by one table. */
  readonly hs: ColumnSet | null;
  readonly levels: LevelColumns | null;
  /** Between which levels the rise and fall times of F/S traffic run. */
  readonly edges: EdgePoints;
  /** Widest uncertainty of one interval, ticks; 0 where times are exact. */
  readonly doubt: number;
}

export interface Measurement {
  bits(block: BitBlock): void;
  spike(spike: Spike): void;
  readonly measured: Measured;
}

/**
 * Uncertainty of an interval between two edges, in ticks. Uniform samples: one sample interval, exclusive (REFERENCE 7); a
 * tick and a half is taken off where the interval was rounded to ticks. Change times are exact to their own step, and an
 * exclusive step leaves nothing but the value itself.
 */
export function doubtOf(head: MeasureHead): number {
  if (head.sampleTicks === null) return 0;
  return head.sampleTicks > 64 ? head.sampleTicks - 1.5 : head.sampleTicks;
}

/**
 * @param tried profiles to judge by, slowest first; empty where no limit may be judged
 * @param hsTable limits for Hs traffic
 */
export function createMeasurement(head: MeasureHead, tried: readonly Profile[], hsTable: LimitTable | null): Measurement {
  const doubt = doubtOf(head);
  const fs = columnsFor(
    tried.map((profile) => profile.limits),
    head.timebase,
    doubt,
    false,
  );
  const { vdd_v = null, vil_v = null, vih_v = null } = head;
  // Several profiles are tried only where none was named, and those are of UM10204.
  const edges = edgePoints({ vdd_v, vil_v, vih_v }, tried.length === 1 ? tried[0] : null);
  const run = new Run(head, doubt, fs, edges, () => columnsFor(hsTable === null ? [] : [hsTable], head.timebase, doubt, true));

  function dropTooSlow(): void {
    for (let k = 0; k < tried.length - 1; k++) {
      if ((fs.period.judgeOf(k)?.below ?? 0) * 2 < fs.period.count) continue;
      for (const column of columnsOf(fs)) {
        const judge = column.judgeOf(k);
        if (judge !== null) judge.dropped = true;
      }
    }
    for (const column of columnsOf(fs)) column.setGates();
  }

  let settled = tried.length < 2;
  return {
    bits(block) {
      run.bits(block);
      if (settled || fs.period.count < SETTLED) return;
      settled = true;
      dropTooSlow();
    },
    spike(spike) {
      fs.spike.add(spike.width, doubt, spike.tick, run.current());
    },
    get measured() {
      return { base: head.timebase, fs, hs: run.hs, levels: run.levels, edges, doubt };
    },
  };
}

/** The walk over the bits. */
class Run {
  hs: ColumnSet | null = null;
  readonly levels: LevelColumns | null;
  private transaction = -1;
  private open = false;
  private slot = 0;
  private shortestLow = Number.POSITIVE_INFINITY;
  private lastStop = Number.NaN;

  constructor(
    head: MeasureHead,
    private readonly doubt: number,
    private readonly fs: ColumnSet,
    private readonly edges: EdgePoints,
    private readonly makeHs: () => ColumnSet,
  ) {
    this.levels = head.levels === "volts" ? levelColumns(doubt) : null;
  }

  current(): number {
    return this.open ? this.transaction : -1;
  }

  bits(block: BitBlock): void {
    const { kind, flags, length } = block;
    const plain = block.leads === null;
    for (let i = 0; i < length; i++) {
      const k = kind[i];
      if (k === LOST) {
        this.open = false;
        this.lastStop = Number.NaN;
        continue;
      }
      const hs = (flags[i] & IN_HS) !== 0;
      if (k === BIT) {
        const next = plain && this.open && !hs ? this.plainBits(block, i) : i;
        if (next > i) i = next - 1;
        else this.bit(block, i, hs ? this.highSpeed() : this.fs);
        continue;
      }
      const set = hs ? this.highSpeed() : this.fs;
      if (k !== START) this.low(block, i, set);
      if (k === STOP) this.stop(block, i, set);
      else this.start(block, i, set, k === START);
    }
  }

  private highSpeed(): ColumnSet {
    this.hs ??= this.makeHs();
    return this.hs;
  }

  // The many: bits of an open F/S transaction on a one-threshold capture. Does what `bit` does, a column at a time; a time that
  // the record does not hold is NaN, and so is then every interval from or to it. Returns the entry after them.
  private plainBits(block: BitBlock, from: number): number {
    const { kind, flags, length, fall, tick, end, sdaFirst, sdaLast } = block;
    const { fs, transaction, doubt } = this;
    let shortest = this.shortestLow;
    let longest = 0;
    let to = from;
    for (; to < length && kind[to] === BIT && (flags[to] & UNUSUAL) === 0; to++) {
      const lasted = tick[to] - fall[to];
      if (lasted < shortest) shortest = lasted;
      if (lasted > longest) longest = lasted;
    }
    fs.low.span(tick, fall, from, to, doubt, transaction);
    fs.timeout?.span(tick, fall, from, to, doubt, transaction);
    fs.high.span(end, tick, from, to, doubt, transaction);
    fs.period.span(end, fall, from, to, doubt, transaction);
    fs.hdDat.span(sdaFirst, fall, from, to, doubt, transaction);
    fs.suDat.span(tick, sdaLast, from, to, doubt, transaction);
    // Held against the shortest low of all, no low was stretched: none was when its own turn came.
    if (longest <= this.stretchedFrom(shortest)) this.calmLows(block, from, to);
    else for (let i = from; i < to; i++) this.oneLow(block, i);
    this.shortestLow = shortest;
    return to;
  }

  /** Lows longer than this are stretched. */
  private stretchedFrom(shortest: number): number {
    return STRETCHED * shortest + 2 * this.doubt;
  }

  // What only lows that are not stretched tell, of a run of them.
  private calmLows(block: BitBlock, from: number, to: number): void {
    const { fall, end, sdaLast } = block;
    const { fs, doubt, transaction } = this;
    fs.slow?.span(end, fall, from, to, doubt, transaction);
    this.slot = fs.vdDat.spanBytes(sdaLast, fall, from, to, doubt, transaction, this.slot, fs.vdAck);
  }

  // The same of one low of a run in which some are stretched.
  private oneLow(block: BitBlock, i: number): void {
    const lasted = block.tick[i] - block.fall[i];
    if (lasted < this.shortestLow) this.shortestLow = lasted;
    if (lasted <= this.stretchedFrom(this.shortestLow)) this.calmLows(block, i, i + 1);
    else this.slot = this.slot === ACK_SLOT ? 0 : this.slot + 1;
  }

  // The low before the high that this entry stands in. Returns whether it was stretched.
  private low(block: BitBlock, i: number, set: ColumnSet): boolean {
    const { leads } = block;
    const fall = block.fall[i];
    const measured = (leads === null ? block.rise[i] : block.rise[i] - leads.rise[i]) - fall;
    // NaN where the record does not hold this low's beginning.
    if (Number.isNaN(measured)) return true;
    const at = this.current();
    set.low.add(measured, this.doubt, fall, at);
    set.timeout?.add(measured, this.doubt, fall, at);
    if (measured < this.shortestLow) this.shortestLow = measured;
    const first = block.sdaFirst[i];
    if (!Number.isNaN(first)) {
      set.hdDat.add((leads === null ? first : first - leads.sdaFirst[i]) - fall, this.doubt, fall, at);
    }
    return measured > this.stretchedFrom(this.shortestLow);
  }

  private bit(block: BitBlock, i: number, set: ColumnSet): void {
    const { leads } = block;
    const { doubt } = this;
    const at = this.current();
    const stretched = this.low(block, i, set);
    const outside = (block.flags[i] & OUTSIDE) !== 0;
    const fall = block.fall[i];
    const rise = block.tick[i];
    const end = block.end[i];
    if (!Number.isNaN(end)) {
      set.high.add((leads === null ? end : end - leads.end[i]) - rise, doubt, rise, at);
      if (!Number.isNaN(fall)) {
        set.period.add(end - fall, doubt, fall, at);
        if (!stretched) set.slow?.add(end - fall, doubt, fall, at);
      }
    }
    const last = block.sdaLast[i];
    if (!Number.isNaN(last)) {
      set.suDat.add((leads === null ? rise : rise - leads.rise[i]) - last, doubt, last, at);
      if (!stretched && !outside) (this.slot === ACK_SLOT ? set.vdAck : set.vdDat).add(last - fall, doubt, fall, at);
    }
    if (leads !== null) this.shapes(block, i, set, at);
    if (!outside) this.slot = this.slot === ACK_SLOT ? 0 : this.slot + 1;
  }

  // Volts only: edges and levels of one bit. Each SCL edge is taken once, at the bit it rises for or ends.
  private shapes(block: BitBlock, i: number, set: ColumnSet, at: number): void {
    const { leads } = block;
    if (leads === null) return;
    const scale = set === this.fs ? this.edges : THIRTY_TO_SEVENTY;
    this.edge(this.slot === 0 ? set.sclRise1 : set.sclRise, leads.rise[i], block.tick[i], scale.rise, at);
    this.edge(set.sclFall, leads.end[i], block.end[i], scale.fall, at);
    const last = block.sdaLast[i];
    if (block.value[i] === 1) this.edge(set.sdaRise, leads.sdaLast[i], last, scale.rise, at);
    else this.edge(set.sdaFall, leads.sdaLast[i], last, scale.fall, at);
    if (this.levels !== null) noteLevels(this.levels, block, i, at);
  }

  // One edge whose second crossing is at `tick`; NaN or no lead is no edge.
  private edge(column: Column, lead: number, tick: number, scale: number, at: number): void {
    if (!(lead > 0) || Number.isNaN(tick)) return;
    column.add(lead * scale, Math.min(this.doubt, this.edgeDoubt(lead) * scale), tick - lead, at);
  }

  // Both crossings of an edge that several samples show are interpolated, far inside one sample; half of one is on the safe side.
  private edgeDoubt(lead: number): number {
    return lead >= 2 * this.doubt ? this.doubt / 2 : this.doubt;
  }

  private stop(block: BitBlock, i: number, set: ColumnSet): void {
    const { leads } = block;
    const rise = block.rise[i];
    const tick = block.tick[i];
    const measured = (leads === null ? tick : tick - leads.sdaLast[i]) - rise;
    if (!Number.isNaN(measured)) set.suSto.add(measured, this.doubt, rise, this.current());
    if (leads !== null) this.edge(set.sdaRise, leads.sdaLast[i], tick, set === this.fs ? this.edges.rise : 1, this.current());
    this.open = false;
    this.lastStop = tick;
  }

  private start(block: BitBlock, i: number, set: ColumnSet, plain: boolean): void {
    const { leads } = block;
    const tick = block.tick[i];
    const begins = leads === null ? tick : tick - leads.sdaLast[i];
    this.transaction++;
    this.open = true;
    this.slot = 0;
    this.shortestLow = Number.POSITIVE_INFINITY;
    const at = this.transaction;
    if (plain) {
      const free = begins - this.lastStop;
      if (!Number.isNaN(free)) set.buf.add(free, this.doubt, this.lastStop, at);
    } else {
      const setUp = begins - block.rise[i];
      if (!Number.isNaN(setUp)) set.suSta.add(setUp, this.doubt, block.rise[i], at);
    }
    this.lastStop = Number.NaN;
    const hold = (leads === null ? block.end[i] : block.end[i] - leads.end[i]) - tick;
    if (!Number.isNaN(hold)) set.hdSta.add(hold, this.doubt, tick, at);
    if (leads !== null) this.edge(set.sdaFall, leads.sdaLast[i], tick, set === this.fs ? this.edges.fall : 1, at);
  }
}
