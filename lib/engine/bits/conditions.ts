// In: edges without spikes. Out: bits (START, Sr, STOP, one entry per bit-carrying SCL pulse). UM10204 3.1.3 - 3.1.5, 3.1.10.
// A change of SDA counts only against the level SCL has around that instant: in the tick in which SCL falls it belongs to the
// low that begins, in the tick in which SCL rises it belongs to the low that ends.

import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN, type VoltColumns } from "../samples/edges";
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
/** Both lines known, no cut: the values of `lines` from 0 to 3. */
const LEVELS = SCL | SDA;
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
  // Times live in an object's fields: captured variables would box every double anew.
  const at = {
    fall: Number.NaN,
    rise: Number.NaN,
    sdaFirst: Number.NaN,
    sdaLast: Number.NaN,
    riseEdge: Number.NaN,
    pendingTick: Number.NaN,
    pendingEdge: Number.NaN,
    pendingLead: Number.NaN,
    lastTick: Number.NaN,
    lastEdge: Number.NaN,
    fallLead: Number.NaN,
    riseLead: Number.NaN,
    firstLead: Number.NaN,
    lastLead: Number.NaN,
    sclLow: Number.NaN,
    sdaHigh: Number.NaN,
  };
  // Levels before the current event; UNKNOWN until the first one.
  let lines = UNKNOWN;
  let lowFlags = 0;
  // A transaction is open (START seen, no STOP yet); busy without one means clocks came before any START.
  let open = false;
  let busy = false;
  // The high under way saw a condition, so its pulse carries no bit.
  let conditionInHigh = false;
  // START and Sr wait for the SCL fall that gives their `end`.
  let pending = NONE;
  // Slot of the next bit, and the bits since START, to find the Hs controller code.
  let slot = 0;
  let sinceStart = 0;
  let shift = 0;
  let hs = false;
  let afterPlainStart = false;
  // Volts: leads of the edges remembered above.

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
    out.fall[i] = plain ? at.fall : Number.NaN;
    out.rise[i] = plain ? at.rise : Number.NaN;
    out.sdaFirst[i] = plain ? at.sdaFirst : Number.NaN;
    out.sdaLast[i] = plain ? at.sdaLast : Number.NaN;
    if (leads !== null) putLeads(i, kind, endLead);
  }

  function putLeads(i: number, kind: number, endLead: number): void {
    if (leads === null) return;
    leads.fall[i] = at.fallLead;
    leads.rise[i] = at.riseLead;
    leads.end[i] = endLead;
    leads.sdaFirst[i] = at.firstLead;
    leads.sdaLast[i] = kind === BIT ? at.lastLead : at.pendingLead;
    leads.sdaHigh[i] = at.sdaHigh;
    leads.sclLow[i] = at.sclLow;
  }

  function putBit(value: number, end: number, endLead: number): void {
    put(BIT, value, open ? lowFlags : lowFlags | OUTSIDE, at.rise, at.riseEdge, end, endLead);
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
    put(kind, 0, 0, at.pendingTick, at.pendingEdge, end, endLead);
  }

  function condition(tick: number, edge: number, sdaRose: boolean, lead: number): void {
    putPending(Number.NaN, 0);
    conditionInHigh = true;
    at.pendingLead = lead;
    if (sdaRose) {
      put(STOP, 0, 0, tick, edge, Number.NaN, 0);
      open = false;
      busy = false;
      hs = false;
      return;
    }
    pending = open || busy ? REPEATED_START : START;
    afterPlainStart = pending === START;
    at.pendingTick = tick;
    at.pendingEdge = edge;
    open = true;
    busy = true;
    slot = 0;
    sinceStart = 0;
    shift = 0;
  }

  // The high under way when the record breaks off: inside a byte its bit was readable; between bytes it may have been a STOP's.
  function settleHigh(): void {
    putPending(Number.NaN, 0);
    const high = (lines & SCL) !== 0 && !conditionInHigh && !Number.isNaN(at.rise);
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
    at.fall = Number.NaN;
    at.rise = Number.NaN;
    at.sdaFirst = Number.NaN;
    at.sdaLast = Number.NaN;
    lowFlags = 0;
    lines = next & ~CUT;
    busy = (lines & (UNKNOWN | SCL)) === 0;
  }

  function noteSda(tick: number, lead: number): void {
    if (Number.isNaN(at.sdaFirst)) {
      at.sdaFirst = tick;
      at.firstLead = lead;
    }
    at.sdaLast = tick;
    at.lastLead = lead;
  }

  // The SCL fall in full: ends a bit or a pending condition, begins a low.
  function sclFell(tick: number, changed: number, volt: VoltColumns | null, i: number): void {
    const lead = volt === null ? 0 : volt.leadScl[i];
    if (pending !== NONE) putPending(tick, lead);
    else if (!conditionInHigh && !Number.isNaN(at.rise)) putBit((lines & SDA) === 0 ? 0 : 1, tick, lead);
    if (!open && !conditionInHigh) busy = busy || Number.isNaN(at.rise);
    conditionInHigh = false;
    at.fall = tick;
    const held = (changed & SDA) !== 0;
    lowFlags = held ? HOLD_WITHIN_SAMPLE : 0;
    at.sdaFirst = held ? tick : Number.NaN;
    at.sdaLast = at.sdaFirst;
    if (volt === null) return;
    at.fallLead = lead;
    at.firstLead = volt.leadSda[i];
    at.lastLead = at.firstLead;
    at.sclLow = volt.meanScl[i];
  }

  function sclRose(tick: number, edge: number, changed: number, volt: VoltColumns | null, i: number): void {
    at.rise = tick;
    at.riseEdge = edge;
    if ((changed & SDA) !== 0) {
      lowFlags |= SETUP_WITHIN_SAMPLE;
      noteSda(tick, volt === null ? 0 : volt.leadSda[i]);
    }
    if (volt === null) return;
    at.riseLead = volt.leadScl[i];
    at.sdaHigh = volt.meanSda[i];
  }

  function step(next: number, tick: number, edge: number, volt: VoltColumns | null, i: number): void {
    if (((next | lines) & (UNKNOWN | CUT)) !== 0) {
      lose(tick, edge, next);
      return;
    }
    const changed = next ^ lines;
    if ((changed & SCL) !== 0) {
      if ((next & SCL) === 0) sclFell(tick, changed, volt, i);
      else sclRose(tick, edge, changed, volt, i);
    } else if (changed !== 0) {
      const lead = volt === null ? 0 : volt.leadSda[i];
      if ((next & SCL) !== 0) condition(tick, edge, (next & SDA) !== 0, lead);
      else noteSda(tick, lead);
    }
    if (volt !== null && (next & SCL) === 0 && Number.isNaN(at.sclLow)) at.sclLow = volt.meanScl[i];
    lines = next;
  }

  // The bits of one byte as they come in lawful traffic, with everything in locals; stops at the first entry that is anything
  // else, which `step` then takes. Returns the index it stopped at.
  function runPlain(block: EdgeBlock, from: number, to: number, firstEdge: number): number {
    const { ticks, lines: levels } = block;
    const {
      kind,
      value,
      flags,
      tick: tickColumn,
      fall: fallColumn,
      rise: riseColumn,
      end,
      sdaFirst: firstColumn,
      sdaLast,
      edge,
    } = out;
    const carried = hs ? IN_HS : 0;
    let now = lines;
    let fall = at.fall;
    let rise = at.rise;
    let riseEdge = at.riseEdge;
    let first = at.sdaFirst;
    let last = at.sdaLast;
    let n = out.length;
    let i = from;
    // Below the first nine bits of a transaction `putBit` looks for the Hs controller code, so they go through `step`.
    for (; i < to && n < BIT_BLOCK_CAPACITY; i++) {
      const next = levels[i];
      const changed = next ^ now;
      if (next > LEVELS || changed === (SCL | SDA)) break;
      if (changed === SCL) {
        if ((next & SCL) !== 0) {
          rise = ticks[i];
          riseEdge = firstEdge + i;
        } else {
          kind[n] = BIT;
          value[n] = now >> 1;
          flags[n] = carried;
          tickColumn[n] = rise;
          fallColumn[n] = fall;
          riseColumn[n] = rise;
          end[n] = ticks[i];
          firstColumn[n] = first;
          sdaLast[n] = last;
          edge[n] = riseEdge;
          n++;
          slot = slot === SLOTS - 1 ? 0 : slot + 1;
          fall = ticks[i];
          first = Number.NaN;
          last = Number.NaN;
        }
      } else if (changed === SDA) {
        if ((next & SCL) !== 0) break;
        last = ticks[i];
        if (Number.isNaN(first)) first = last;
      }
      now = next;
    }
    lines = now;
    at.fall = fall;
    at.rise = rise;
    at.riseEdge = riseEdge;
    at.sdaFirst = first;
    at.sdaLast = last;
    out.length = n;
    return i;
  }

  function run(block: EdgeBlock, from: number, to: number, firstEdge: number): void {
    const { ticks, volts: volt, lines: levels } = block;
    let i = from;
    while (i < to) {
      if (
        volt === null &&
        open &&
        sinceStart === SLOTS &&
        lowFlags === 0 &&
        pending === NONE &&
        !conditionInHigh &&
        lines <= LEVELS
      ) {
        if (out.length === BIT_BLOCK_CAPACITY) flush();
        i = runPlain(block, i, to, firstEdge);
        if (i === to || out.length === BIT_BLOCK_CAPACITY) continue;
      }
      step(levels[i], ticks[i], firstEdge + i, volt, i);
      i++;
    }
    if (to > from) {
      at.lastTick = ticks[to - 1];
      at.lastEdge = firstEdge + to - 1;
    }
  }

  function flush(): void {
    if (out.length === 0) return;
    emit(out);
    out.length = 0;
  }

  function finish(endTick: number): void {
    settleHigh();
    if (open || busy) put(LOST, 0, open ? 0 : OUTSIDE, Math.max(endTick, at.lastTick), at.lastEdge, Number.NaN, 0);
    open = false;
    flush();
  }

  return { run, flush, finish, inHs: () => hs };
}
