// In: edges without spikes. Out: bits (START, Sr, STOP, one entry per bit-carrying SCL pulse). UM10204 3.1.3 - 3.1.5, 3.1.10.
// A change of SDA counts only against the level SCL has around that instant: in the tick in which SCL falls it belongs to the
// low that begins, in the tick in which SCL rises it belongs to the low that ends.

import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../samples/edges";
import {
  BIT,
  type BitBlock,
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

const UNKNOWN = SCL_UNKNOWN | SDA_UNKNOWN;
/** Pulses of one byte on the wire: eight bits and the acknowledge. */
const SLOTS = 9;
/** No condition pending. */
const NONE = -1;

export interface ConditionDecoder {
  /** Decodes entries `from` to `to` (exclusive) of a block. `firstEdge` is the index of entry 0 over the whole capture. */
  run(block: EdgeBlock, from: number, to: number, firstEdge: number): void;
  /** Hands on what is ready. */
  flush(): void;
  /** Ends the record. */
  finish(endTick: number): void;
  /** True between an Hs controller code and the STOP after it. */
  inHs(): boolean;
}

/**
 * Bits of a stream of edges. `emit` gets each filled block; the block is reused after the call returns.
 */
export function createConditionDecoder(volts: boolean, emit: (block: BitBlock) => void): ConditionDecoder {
  const out = newBitBlock(volts);
  const leads = out.leads;
  // Levels before the current event; UNKNOWN until the first one.
  let lines = UNKNOWN;
  let fall = Number.NaN;
  let rise = Number.NaN;
  let sdaFirst = Number.NaN;
  let sdaLast = Number.NaN;
  let riseEdge = 0;
  let lowFlags = 0;
  // A transaction is open (START seen, no STOP yet); busy without one means clocks came before any START.
  let open = false;
  let busy = false;
  // The high under way saw a condition, so its pulse carries no bit.
  let conditionInHigh = false;
  // START and Sr wait for the SCL fall that gives their `end`.
  let pending = NONE;
  let pendingTick = 0;
  let pendingEdge = 0;
  let pendingLead = 0;
  // Slot of the next bit, and the bits since START, to find the Hs controller code.
  let slot = 0;
  let sinceStart = 0;
  let shift = 0;
  let hs = false;
  let afterPlainStart = false;
  let lastTick = 0;
  let lastEdge = 0;
  // Volts: leads of the edges remembered above.
  let fallLead = 0;
  let riseLead = 0;
  let firstLead = 0;
  let lastLead = 0;
  let sclLow = Number.NaN;
  let sdaHigh = Number.NaN;

  function put(kind: number, value: number, flags: number, tick: number, edge: number, end: number, endLead: number): void {
    if (out.length === BIT_BLOCK_CAPACITY) flush();
    const i = out.length++;
    out.kind[i] = kind;
    out.value[i] = value;
    out.flags[i] = flags | (hs ? IN_HS : 0);
    out.tick[i] = tick;
    out.edge[i] = edge;
    out.end[i] = end;
    const plain = kind !== START && kind !== LOST;
    out.fall[i] = plain ? fall : Number.NaN;
    out.rise[i] = plain ? rise : Number.NaN;
    out.sdaFirst[i] = plain ? sdaFirst : Number.NaN;
    out.sdaLast[i] = plain ? sdaLast : Number.NaN;
    if (leads !== null) putLeads(i, kind, endLead);
  }

  function putLeads(i: number, kind: number, endLead: number): void {
    if (leads === null) return;
    leads.fall[i] = fallLead;
    leads.rise[i] = riseLead;
    leads.end[i] = endLead;
    leads.sdaFirst[i] = firstLead;
    leads.sdaLast[i] = kind === BIT ? lastLead : pendingLead;
    leads.sdaHigh[i] = sdaHigh;
    leads.sclLow[i] = sclLow;
  }

  function putBit(value: number, end: number, endLead: number): void {
    put(BIT, value, open ? lowFlags : lowFlags | OUTSIDE, rise, riseEdge, end, endLead);
    if (!open) return;
    slot = slot === SLOTS - 1 ? 0 : slot + 1;
    if (sinceStart >= SLOTS) return;
    shift = (shift << 1) | value;
    sinceStart++;
    // S, 0000 1XXX, NACK: Hs-mode until STOP (UM10204 5.3.2). Eight bits and the ninth: 0 0001 XXX1.
    if (sinceStart === SLOTS && afterPlainStart && shift >> 4 === 1 && (shift & 1) === 1) hs = true;
  }

  function putPending(end: number, endLead: number): void {
    if (pending === NONE) return;
    const kind = pending;
    pending = NONE;
    put(kind, 0, 0, pendingTick, pendingEdge, end, endLead);
  }

  function condition(tick: number, edge: number, sdaRose: boolean, lead: number): void {
    putPending(Number.NaN, 0);
    conditionInHigh = true;
    pendingLead = lead;
    if (sdaRose) {
      put(STOP, 0, 0, tick, edge, Number.NaN, 0);
      open = false;
      busy = false;
      hs = false;
      return;
    }
    pending = open || busy ? REPEATED_START : START;
    afterPlainStart = pending === START;
    pendingTick = tick;
    pendingEdge = edge;
    open = true;
    busy = true;
    slot = 0;
    sinceStart = 0;
    shift = 0;
  }

  // The high under way when the record breaks off: inside a byte its bit was readable; between bytes it may have been a STOP's.
  function settleHigh(): void {
    putPending(Number.NaN, 0);
    const high = (lines & SCL) !== 0 && !conditionInHigh && !Number.isNaN(rise);
    if (high && open && slot > 0) putBit((lines & SDA) === 0 ? 0 : 1, Number.NaN, 0);
  }

  function lose(tick: number, edge: number, next: number): void {
    if ((lines & UNKNOWN) === 0) {
      settleHigh();
      put(LOST, 0, open ? 0 : OUTSIDE, tick, edge, Number.NaN, 0);
    }
    open = false;
    hs = false;
    conditionInHigh = false;
    fall = Number.NaN;
    rise = Number.NaN;
    sdaFirst = Number.NaN;
    sdaLast = Number.NaN;
    lowFlags = 0;
    lines = next & ~CUT;
    busy = (lines & (UNKNOWN | SCL)) === 0;
  }

  function sclFell(tick: number, edge: number, changed: number, volt: EdgeBlock["volts"], i: number): void {
    const lead = volt === null ? 0 : volt.leadScl[i];
    if (pending !== NONE) putPending(tick, lead);
    else if (!conditionInHigh && !Number.isNaN(rise)) putBit((lines & SDA) === 0 ? 0 : 1, tick, lead);
    if (!open && !conditionInHigh) busy = busy || Number.isNaN(rise);
    conditionInHigh = false;
    fall = tick;
    lowFlags = 0;
    sdaFirst = Number.NaN;
    if ((changed & SDA) !== 0) {
      sdaFirst = tick;
      lowFlags = HOLD_WITHIN_SAMPLE;
    }
    sdaLast = sdaFirst;
    if (volt !== null) {
      fallLead = lead;
      firstLead = volt.leadSda[i];
      lastLead = firstLead;
      sclLow = volt.meanScl[i];
    }
    lastEdge = edge;
  }

  function sclRose(tick: number, edge: number, changed: number, volt: EdgeBlock["volts"], i: number): void {
    rise = tick;
    riseEdge = edge;
    if ((changed & SDA) !== 0) {
      lowFlags |= SETUP_WITHIN_SAMPLE;
      noteSda(tick, volt === null ? 0 : volt.leadSda[i]);
    }
    if (volt !== null) {
      riseLead = volt.leadScl[i];
      sdaHigh = volt.meanSda[i];
    }
  }

  function noteSda(tick: number, lead: number): void {
    if (Number.isNaN(sdaFirst)) {
      sdaFirst = tick;
      firstLead = lead;
    }
    sdaLast = tick;
    lastLead = lead;
  }

  function run(block: EdgeBlock, from: number, to: number, firstEdge: number): void {
    const { ticks, volts: volt } = block;
    const levels = block.lines;
    for (let i = from; i < to; i++) {
      const next = levels[i];
      const tick = ticks[i];
      if (((next | lines) & (UNKNOWN | CUT)) !== 0) {
        lose(tick, firstEdge + i, next);
        continue;
      }
      const changed = next ^ lines;
      if ((changed & SCL) !== 0) {
        if ((next & SCL) === 0) sclFell(tick, firstEdge + i, changed, volt, i);
        else sclRose(tick, firstEdge + i, changed, volt, i);
      } else if (changed !== 0) {
        const lead = volt === null ? 0 : volt.leadSda[i];
        if ((next & SCL) !== 0) condition(tick, firstEdge + i, (next & SDA) !== 0, lead);
        else noteSda(tick, lead);
      }
      if (volt !== null && (next & SCL) === 0 && Number.isNaN(sclLow)) sclLow = volt.meanScl[i];
      lines = next;
    }
    if (to > from) {
      lastTick = ticks[to - 1];
      lastEdge = firstEdge + to - 1;
    }
  }

  function flush(): void {
    if (out.length === 0) return;
    emit(out);
    out.length = 0;
  }

  function finish(endTick: number): void {
    settleHigh();
    if (open || busy) put(LOST, 0, open ? 0 : OUTSIDE, Math.max(endTick, lastTick), lastEdge, Number.NaN, 0);
    open = false;
    flush();
  }

  return { run, flush, finish, inHs: () => hs };
}
