// In: edges without spikes. Out: bits (START, Sr, STOP, one entry per bit-carrying SCL pulse). UM10204 3.1.3 - 3.1.5, 3.1.10.
// A change of SDA counts only against the level SCL has around that instant: in the tick in which SCL falls it belongs to the
// low that begins, in the tick in which SCL rises it belongs to the low that ends.

import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN, type VoltColumns } from "../samples/edges";
import {
  BIT,
  type BitBlock,
  type BitLeads,
  HOLD_WITHIN_SAMPLE,
  IN_HS,
  LOST,
  OUTSIDE,
  REPEATED_START,
  SETUP_WITHIN_SAMPLE,
  START,
  STOP,
} from "./bits";
import { BIT_BLOCK_CAPACITY, newBitBlock } from "./columns";
import { type PlainState, plainBits } from "./plain";

const UNKNOWN = SCL_UNKNOWN | SDA_UNKNOWN;
/** Pulses of one byte on the wire: eight bits and the acknowledge. */
const SLOTS = 9;
/** No condition pending. */
const NONE = -1;

/** Bits of a stream of edges. `emit` gets each filled block; the block is reused after the call returns. */
export class ConditionDecoder implements PlainState {
  /** Levels before the current event; UNKNOWN until the first one. */
  lines = UNKNOWN;
  fall = Number.NaN;
  rise = Number.NaN;
  riseEdge = Number.NaN;
  private sdaFirst = Number.NaN;
  private sdaLast = Number.NaN;
  private lowFlags = 0;
  private lastTick = Number.NaN;
  private lastEdge = Number.NaN;
  /** A transaction is open (START seen, no STOP yet); busy without one means clocks came before any START. */
  private open = false;
  private busy = false;
  /** The high under way saw a condition, so its pulse carries no bit. */
  private conditionInHigh = false;
  /** START and Sr wait for the SCL fall that gives their `end`. */
  private pending = NONE;
  private pendingTick = Number.NaN;
  private pendingEdge = Number.NaN;
  /** Slot of the next bit, and the bits since START, to find the Hs controller code. */
  private slot = 0;
  private sinceStart = 0;
  private shift = 0;
  private hs = false;
  private afterPlainStart = false;
  /** Volts: leads of the edges remembered above, and mean levels. */
  private pendingLead = Number.NaN;
  private fallLead = Number.NaN;
  private riseLead = Number.NaN;
  private firstLead = Number.NaN;
  private lastLead = Number.NaN;
  private sclLow = Number.NaN;
  private sdaHigh = Number.NaN;
  private readonly out: BitBlock;
  private readonly leads: BitLeads | null;

  constructor(
    volts: boolean,
    private readonly emit: (block: BitBlock) => void,
  ) {
    this.out = newBitBlock(volts);
    this.leads = this.out.leads;
  }

  /** True between an Hs controller code and the STOP after it. */
  inHs(): boolean {
    return this.hs;
  }

  /** Decodes entries `from` to `to` (exclusive) of a block. `firstEdge` is the index of entry 0 over the whole capture. */
  run(block: EdgeBlock, from: number, to: number, firstEdge: number): void {
    const { ticks, volts, lines: levels } = block;
    for (let i = from; i < to; i++) {
      if (this.inPlainLow()) {
        i = this.plain(block, i, to, firstEdge);
        if (i === to) break;
      }
      this.step(levels[i], ticks[i], firstEdge + i, volts, i);
    }
    if (to > from) {
      this.lastTick = ticks[to - 1];
      this.lastEdge = firstEdge + to - 1;
    }
  }

  /** Hands on what is ready. */
  flush(): void {
    if (this.out.length === 0) return;
    this.emit(this.out);
    this.out.length = 0;
  }

  /** Ends the record. */
  finish(endTick: number): void {
    this.settleHigh();
    if (this.open || this.busy) {
      this.put(LOST, 0, this.open ? 0 : OUTSIDE, Math.max(endTick, this.lastTick), this.lastEdge, Number.NaN, 0);
    }
    this.open = false;
    this.flush();
  }

  // In an SCL low of a transaction, no change of SDA in it so far, on a one-threshold capture.
  private inPlainLow(): boolean {
    return (this.lines & (SCL | UNKNOWN)) === 0 && this.open && this.leads === null && Number.isNaN(this.sdaFirst);
  }

  // Bits as they come in lawful traffic. Returns the entry that `step` has to take.
  private plain(block: EdgeBlock, from: number, to: number, firstEdge: number): number {
    const { out } = this;
    let i = from;
    for (;;) {
      if (out.length === BIT_BLOCK_CAPACITY) this.flush();
      const had = out.length;
      // The first nine bits of a transaction may be an Hs controller code, after which the flags are others.
      const room = BIT_BLOCK_CAPACITY - had;
      const most = this.sinceStart < SLOTS ? Math.min(room, SLOTS - this.sinceStart) : room;
      i = plainBits(this, out, block, i, to, firstEdge, most, this.hs ? IN_HS : 0);
      const found = out.length - had;
      this.slot = (this.slot + found) % SLOTS;
      for (let n = had; n < out.length && this.sinceStart < SLOTS; n++) this.noteFirst(out.value[n]);
      if (found < most) return i;
    }
  }

  private put(kind: number, value: number, flags: number, tick: number, edge: number, end: number, endLead: number): void {
    const { out } = this;
    if (out.length === BIT_BLOCK_CAPACITY) this.flush();
    const i = out.length++;
    out.kind[i] = kind;
    out.value[i] = value;
    out.flags[i] = flags | (this.hs ? IN_HS : 0);
    out.tick[i] = tick;
    out.edge[i] = edge;
    out.end[i] = end;
    const plain = kind !== START && kind !== LOST;
    out.fall[i] = plain ? this.fall : Number.NaN;
    out.rise[i] = plain ? this.rise : Number.NaN;
    out.sdaFirst[i] = plain ? this.sdaFirst : Number.NaN;
    out.sdaLast[i] = plain ? this.sdaLast : Number.NaN;
    if (this.leads !== null) this.putLeads(this.leads, i, kind, endLead);
  }

  private putLeads(leads: BitLeads, i: number, kind: number, endLead: number): void {
    leads.fall[i] = this.fallLead;
    leads.rise[i] = this.riseLead;
    leads.end[i] = endLead;
    leads.sdaFirst[i] = this.firstLead;
    leads.sdaLast[i] = kind === BIT ? this.lastLead : this.pendingLead;
    leads.sdaHigh[i] = this.sdaHigh;
    leads.sclLow[i] = this.sclLow;
  }

  private putBit(value: number, end: number, endLead: number): void {
    this.put(BIT, value, this.open ? this.lowFlags : this.lowFlags | OUTSIDE, this.rise, this.riseEdge, end, endLead);
    if (!this.open) return;
    this.slot = this.slot === SLOTS - 1 ? 0 : this.slot + 1;
    if (this.sinceStart < SLOTS) this.noteFirst(value);
  }

  // The first nine bits of a transaction.
  private noteFirst(value: number): void {
    this.shift = (this.shift << 1) | value;
    this.sinceStart++;
    // S, 0000 1XXX, NACK: Hs-mode until STOP (UM10204 5.3.2). Eight bits and the ninth: 0 0001 XXX1.
    if (this.sinceStart === SLOTS && this.afterPlainStart && this.shift >> 4 === 1 && (this.shift & 1) === 1) this.hs = true;
  }

  private putPending(end: number, endLead: number): void {
    if (this.pending === NONE) return;
    const kind = this.pending;
    this.pending = NONE;
    this.put(kind, 0, 0, this.pendingTick, this.pendingEdge, end, endLead);
  }

  private condition(tick: number, edge: number, sdaRose: boolean, lead: number): void {
    this.putPending(Number.NaN, 0);
    this.conditionInHigh = true;
    this.pendingLead = lead;
    if (sdaRose) {
      this.put(STOP, 0, 0, tick, edge, Number.NaN, 0);
      this.open = false;
      this.busy = false;
      this.hs = false;
      return;
    }
    this.pending = this.open || this.busy ? REPEATED_START : START;
    this.afterPlainStart = this.pending === START;
    this.pendingTick = tick;
    this.pendingEdge = edge;
    this.open = true;
    this.busy = true;
    this.slot = 0;
    this.sinceStart = 0;
    this.shift = 0;
  }

  // The high under way when the record breaks off: inside a byte its bit was readable; between bytes it may have been a STOP's.
  private settleHigh(): void {
    this.putPending(Number.NaN, 0);
    const high = (this.lines & SCL) !== 0 && !this.conditionInHigh && !Number.isNaN(this.rise);
    if (high && this.open && this.slot > 0) this.putBit((this.lines & SDA) === 0 ? 0 : 1, Number.NaN, 0);
  }

  private lose(tick: number, edge: number, next: number): void {
    if ((this.lines & UNKNOWN) === 0) {
      this.settleHigh();
      this.put(LOST, 0, this.open ? 0 : OUTSIDE, tick, edge, Number.NaN, 0);
    }
    this.open = false;
    this.hs = false;
    this.conditionInHigh = false;
    this.fall = Number.NaN;
    this.rise = Number.NaN;
    this.sdaFirst = Number.NaN;
    this.sdaLast = Number.NaN;
    this.lowFlags = 0;
    this.lines = next & ~CUT;
    this.busy = (this.lines & (UNKNOWN | SCL)) === 0;
  }

  private noteSda(tick: number, lead: number): void {
    if (Number.isNaN(this.sdaFirst)) {
      this.sdaFirst = tick;
      this.firstLead = lead;
    }
    this.sdaLast = tick;
    this.lastLead = lead;
  }

  // The SCL fall in full: ends a bit or a pending condition, begins a low.
  private sclFell(tick: number, changed: number, volt: VoltColumns | null, i: number): void {
    const lead = volt === null ? 0 : volt.leadScl[i];
    if (this.pending !== NONE) this.putPending(tick, lead);
    else if (!this.conditionInHigh && !Number.isNaN(this.rise)) this.putBit((this.lines & SDA) === 0 ? 0 : 1, tick, lead);
    if (!this.open && !this.conditionInHigh) this.busy = this.busy || Number.isNaN(this.rise);
    this.conditionInHigh = false;
    this.fall = tick;
    const held = (changed & SDA) !== 0;
    this.lowFlags = held ? HOLD_WITHIN_SAMPLE : 0;
    this.sdaFirst = held ? tick : Number.NaN;
    this.sdaLast = this.sdaFirst;
    if (volt === null) return;
    this.fallLead = lead;
    this.firstLead = volt.leadSda[i];
    this.lastLead = this.firstLead;
    this.sclLow = volt.meanScl[i];
  }

  private sclRose(tick: number, edge: number, changed: number, volt: VoltColumns | null, i: number): void {
    this.rise = tick;
    this.riseEdge = edge;
    if ((changed & SDA) !== 0) {
      this.lowFlags |= SETUP_WITHIN_SAMPLE;
      this.noteSda(tick, volt === null ? 0 : volt.leadSda[i]);
    }
    if (volt === null) return;
    this.riseLead = volt.leadScl[i];
    this.sdaHigh = volt.meanSda[i];
  }

  private step(next: number, tick: number, edge: number, volt: VoltColumns | null, i: number): void {
    if (((next | this.lines) & (UNKNOWN | CUT)) !== 0) {
      this.lose(tick, edge, next);
      return;
    }
    const changed = next ^ this.lines;
    if ((changed & SCL) !== 0) {
      if ((next & SCL) === 0) this.sclFell(tick, changed, volt, i);
      else this.sclRose(tick, edge, changed, volt, i);
    } else if (changed !== 0) {
      const lead = volt === null ? 0 : volt.leadSda[i];
      if ((next & SCL) !== 0) this.condition(tick, edge, (next & SDA) !== 0, lead);
      else this.noteSda(tick, lead);
    }
    if (volt !== null && (next & SCL) === 0 && Number.isNaN(this.sclLow)) this.sclLow = volt.meanScl[i];
    this.lines = next;
  }
}
