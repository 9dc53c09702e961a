// In: edges. Out: the same edges without pulses shorter than tSP, and each such pulse as a Spike. UM10204 Rev 7 Table 10:
// input filters suppress spikes shorter than 50 ns (10 ns in Hs-mode, Table 12). A pulse of tSP or longer is acted on.
// The last tSP of each block is held back until the next block shows how its pulses end. No entry is dropped (one whose
// pulse was taken out just changes nothing), so that the n-th entry going in is the n-th coming out.

import { type Timebase, ticks } from "../../base/time";
import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN, type VoltColumns } from "../samples/edges";
import type { Spike } from "./bits";

/** Fast-mode and Fast-mode Plus; Standard-mode specifies none, and its receivers are built with the same filters (common practice, no source). */
export const TSP_S = 50e-9;
export const TSP_HS_S = 10e-9;
const UNKNOWN = SCL_UNKNOWN | SDA_UNKNOWN;

export interface SpikeFilter {
  push(block: EdgeBlock): void;
  finish(): void;
}

/** What comes after the filter. `inHs` tells, as of the edges passed on so far, which tSP holds. */
export interface SpikeListener {
  edges(block: EdgeBlock): void;
  spike(spike: Spike): void;
  inHs(): boolean;
}

/** True where no pulse of this capture can be known to be shorter than tSP, so that the filter has nothing to do. */
export function spikesAreBelowResolution(base: Timebase, sampleTicks: number | null): boolean {
  if (base.origin === "assumed") return true;
  return sampleTicks !== null && sampleTicks >= ticks(TSP_S, base);
}

export function createSpikeFilter(base: Timebase, listener: SpikeListener): SpikeFilter {
  // Fractions of a tick count: a tick of 20 ns makes 40 ns a spike and 60 ns none.
  const tsp = TSP_S * base.ticksPerSecond;
  const tspHs = TSP_HS_S * base.ticksPerSecond;
  let held: EdgeBlock | null = null;
  let before = UNKNOWN;

  function push(block: EdgeBlock): void {
    if (block.length === 0) return;
    if (held !== null && !crossesInto(held, block)) {
      // Nothing spans the boundary: what was held goes on as it is, and the block needs no joining.
      const kept = held;
      release(kept, kept.length);
    }
    const joined = held === null ? block : concatenate(held, block);
    held = null;
    if (!hasShortPulse(joined, before, tsp)) {
      release(joined, settled(joined, tsp));
      return;
    }
    filter(joined, settled(joined, tsp));
  }

  // Whether a pulse that began in what is held could end in the first tSP of the block.
  function crossesInto(kept: EdgeBlock, block: EdgeBlock): boolean {
    const reach = kept.ticks[kept.length - 1] + tsp;
    let n = 0;
    while (n < block.length && block.ticks[n] < reach) n++;
    if (n === 0) return hasShortPulse(kept, before, tsp);
    return hasShortPulse(concatenate(kept, view(block, 0, n)), before, tsp);
  }

  // Entries that no later entry can turn into half of a spike.
  function settled(block: EdgeBlock, limit: number): number {
    const last = block.ticks[block.length - 1];
    let n = block.length;
    while (n > 0 && last - block.ticks[n - 1] < limit) n--;
    return n;
  }

  function release(block: EdgeBlock, count: number): void {
    if (count > 0) {
      before = block.lines[count - 1] & ~CUT;
      listener.edges(count === block.length ? block : view(block, 0, count));
    }
    held = count === block.length ? null : slice(block, count, block.length);
  }

  // The rare case: walks entry by entry, so that Hs-mode is known where each pulse stands.
  function filter(block: EdgeBlock, count: number): void {
    const work = slice(block, 0, block.length);
    let done = 0;
    let prev = before;
    for (let i = 0; i < count; i++) {
      for (const line of [SCL, SDA] as const) {
        if (((work.lines[i] ^ prev) & line) === 0 || ((work.lines[i] | prev) & (UNKNOWN | CUT)) !== 0) continue;
        const j = pulseEnd(work, i, line, tsp);
        if (j < 0) continue;
        if (i > done) listener.edges(slice(work, done, i));
        if (i > done) before = work.lines[i - 1] & ~CUT;
        done = Math.max(done, i);
        const width = work.ticks[j] - work.ticks[i];
        if (width >= (listener.inHs() ? tspHs : tsp)) continue;
        listener.spike({
          line: line === SCL ? "scl" : "sda",
          tick: work.ticks[i],
          width,
          to: (work.lines[i] & line) === 0 ? 0 : 1,
        });
        for (let k = i; k < j; k++) work.lines[k] ^= line;
      }
      prev = work.lines[i] & ~CUT;
    }
    if (count > done) {
      listener.edges(slice(work, done, count));
      before = work.lines[count - 1] & ~CUT;
    }
    held = count === work.length ? null : slice(work, count, work.length);
  }

  return {
    push,
    finish() {
      if (held !== null) {
        const rest = held;
        filter(rest, rest.length);
      }
    },
  };
}

// Index of the entry in which `line` goes back, where that is less than `limit` after entry i; -1 otherwise.
function pulseEnd(block: EdgeBlock, i: number, line: number, limit: number): number {
  const level = block.lines[i] & line;
  for (let j = i + 1; j < block.length && block.ticks[j] - block.ticks[i] < limit; j++) {
    if ((block.lines[j] & (UNKNOWN | CUT)) !== 0) return -1;
    if ((block.lines[j] & line) !== level) return j;
  }
  return -1;
}

function hasShortPulse(block: EdgeBlock, before: number, limit: number): boolean {
  const { ticks: at, lines, length } = block;
  // Nearly always no two entries are that close, and the look at each line can be spared.
  let close = 1;
  for (let last = at[0]; close < length; close++) {
    if (at[close] - last < limit) break;
    last = at[close];
  }
  if (close >= length) return false;
  let sclAt = Number.NEGATIVE_INFINITY;
  let sdaAt = Number.NEGATIVE_INFINITY;
  let prev = before;
  for (let i = 0; i < length; i++) {
    const next = lines[i];
    const changed = next ^ prev;
    if ((changed & SCL) !== 0) {
      if (at[i] - sclAt < limit) return true;
      sclAt = at[i];
    }
    if ((changed & SDA) !== 0) {
      if (at[i] - sdaAt < limit) return true;
      sdaAt = at[i];
    }
    prev = next;
  }
  return false;
}

const VOLT_COLUMNS = ["leadScl", "leadSda", "meanScl", "meanSda"] as const satisfies readonly (keyof VoltColumns)[];

function allocate(length: number, volts: boolean): EdgeBlock {
  const column = () => new Float32Array(length);
  return {
    length,
    ticks: new Float64Array(length),
    lines: new Uint8Array(length),
    volts: volts ? { leadScl: column(), leadSda: column(), meanScl: column(), meanSda: column() } : null,
  };
}

function slice(block: EdgeBlock, from: number, to: number): EdgeBlock {
  const { volts } = block;
  return {
    length: to - from,
    ticks: block.ticks.slice(from, to),
    lines: block.lines.slice(from, to),
    volts:
      volts === null
        ? null
        : {
            leadScl: volts.leadScl.slice(from, to),
            leadSda: volts.leadSda.slice(from, to),
            meanScl: volts.meanScl.slice(from, to),
            meanSda: volts.meanSda.slice(from, to),
          },
  };
}

/** The same memory: for handing on, never for changing. */
export function view(block: EdgeBlock, from: number, to: number): EdgeBlock {
  const { volts } = block;
  return {
    length: to - from,
    ticks: block.ticks.subarray(from, to),
    lines: block.lines.subarray(from, to),
    volts:
      volts === null
        ? null
        : {
            leadScl: volts.leadScl.subarray(from, to),
            leadSda: volts.leadSda.subarray(from, to),
            meanScl: volts.meanScl.subarray(from, to),
            meanSda: volts.meanSda.subarray(from, to),
          },
  };
}

function concatenate(a: EdgeBlock, b: EdgeBlock): EdgeBlock {
  const out = allocate(a.length + b.length, a.volts !== null && b.volts !== null);
  out.ticks.set(a.ticks.subarray(0, a.length));
  out.ticks.set(b.ticks.subarray(0, b.length), a.length);
  out.lines.set(a.lines.subarray(0, a.length));
  out.lines.set(b.lines.subarray(0, b.length), a.length);
  if (out.volts === null || a.volts === null || b.volts === null) return out;
  for (const name of VOLT_COLUMNS) {
    out.volts[name].set(a.volts[name].subarray(0, a.length));
    out.volts[name].set(b.volts[name].subarray(0, b.length), a.length);
  }
  return out;
}
