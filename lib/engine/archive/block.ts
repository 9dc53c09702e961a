// In: up to a million edges. Out: their bytes before compression, and back. Times are steps of the block's own grid (the
// greatest step that all its times share: the sample period of a sampled capture) from its first tick; an ordinary edge is
// one number, 4 x steps + which lines changed. Columns in volts are kept apart, so that each compresses on its own.

import { CUT, type EdgeBlock, SCL, SDA, type VoltColumns } from "../samples/edges";
import { ByteReader, ByteWriter, CorruptError } from "./bytes";

/** Edges in one block, at most. */
export const BLOCK_EDGES = 1 << 20;
const EDGE_BYTES = 9;
/** Longer pauses are written out, since four times their steps would not be exact. */
const LONGEST = 2 ** 50;
const LEVELS = SCL | SDA;
const ALL_BITS = 31;
/** Means are kept as 16-bit steps of the block's largest. */
const MEAN_STEPS = 32_767;

/** The greatest number of ticks that divides every interval of the block. */
export function gridOf(ticks: Float64Array, length: number): number {
  let step = 0;
  for (let i = 1; i < length && step !== 1; i++) {
    const interval = ticks[i] - ticks[i - 1];
    if (step === 0) step = interval;
    else if (step < 0x7fffffff && interval < 0x7fffffff ? (interval | 0) % (step | 0) !== 0 : interval % step !== 0) {
      let a = step;
      let b = interval;
      while (b !== 0) [a, b] = [b, a % b];
      step = a;
    }
  }
  return step === 0 ? 1 : step;
}

/** `leadStep`: ticks that a lead is rounded to; `meanStep`: volts that a mean is, null to find one that suits the block. */
export function encodeBlock(block: EdgeBlock, leadStep: number, meanStep: number | null = null): Uint8Array<ArrayBuffer> {
  const { ticks, lines, length, volts } = block;
  const out = new ByteWriter(32 + length * 3);
  const step = gridOf(ticks, length);
  const edges = new ByteWriter(length * 2 + 16);
  let last = lines[0] & ~CUT;
  for (let i = 1; i < length; i++) {
    edges.reserve(EDGE_BYTES);
    const interval = ticks[i] - ticks[i - 1];
    if (!(interval > 0)) throw new Error(`edge ${i} stands at tick ${ticks[i]}, not after ${ticks[i - 1]}`);
    const steps = step === 1 ? interval : interval / step;
    const now = lines[i];
    const changed = now ^ last;
    if (steps > LONGEST) {
      edges.varint(0);
      edges.double(steps);
      edges.byte(now);
    } else if (changed > 0 && changed <= LEVELS && now <= LEVELS) edges.varint(steps * 4 + changed);
    else {
      edges.varint(steps * 4);
      edges.byte(now);
    }
    last = now & ~CUT;
  }
  out.double(ticks[0]);
  out.double(step);
  out.byte(lines[0]);
  out.word(edges.length);
  out.put(edges.bytes());
  if (volts) {
    out.put(encodeLeads(volts, lines, length, leadStep));
    out.put(encodeMeans(volts, lines, length, meanStep));
  }
  return out.bytes();
}

/** One number per line that changed: 0 for unknown, else the lead in steps plus one. An edge's other line has no lead. */
function encodeLeads({ leadScl, leadSda }: VoltColumns, lines: Uint8Array, length: number, leadStep: number): Uint8Array {
  const out = new ByteWriter(length * 3 + 16);
  let last = -1;
  const put = (lead: number) => {
    out.reserve(EDGE_BYTES);
    out.varint(Number.isNaN(lead) ? 0 : Math.round(lead / leadStep) + 1);
  };
  for (let i = 0; i < length; i++) {
    const changed = last < 0 ? ALL_BITS : lines[i] ^ last;
    if (carriesLead(changed, SCL)) put(leadScl[i]);
    if (carriesLead(changed, SDA)) put(leadSda[i]);
    last = lines[i] & ~CUT;
  }
  const bytes = out.bytes();
  out.length = 0;
  out.word(bytes.length);
  out.put(bytes);
  return out.bytes();
}

/** A change of a line's level or of its being known; the unknown bits stand two above the levels. */
const carriesLead = (changed: number, line: number) => (changed & (line | (line << 2))) !== 0;

function ownStep({ meanScl, meanSda }: VoltColumns, length: number): number {
  let largest = 0;
  for (const column of [meanScl, meanSda]) {
    for (let i = 0; i < length; i++) if (Math.abs(column[i]) > largest) largest = Math.abs(column[i]);
  }
  return largest / MEAN_STEPS || 1;
}

/** Each mean as its difference from the latest mean of the same line at the same level, where it hardly differs. */
function encodeMeans(volts: VoltColumns, lines: Uint8Array, length: number, given: number | null): Uint8Array {
  const { meanScl, meanSda } = volts;
  const step = given ?? ownStep(volts, length);
  const out = new ByteWriter(length * 4 + 16);
  const known = new Int32Array(4);
  for (let i = 0; i < length; i++) {
    out.reserve(2 * EDGE_BYTES);
    for (let line = 0; line < 2; line++) {
      const mean = line === 0 ? meanScl[i] : meanSda[i];
      const at = 2 * line + ((lines[i] >> line) & 1);
      if (Number.isNaN(mean)) {
        out.varint(0);
        continue;
      }
      const steps = Math.round(mean / step);
      const difference = steps - known[at];
      out.varint(difference < 0 ? -2 * difference : 2 * difference + 1);
      known[at] = steps;
    }
  }
  const bytes = out.bytes();
  out.length = 0;
  out.double(step);
  out.word(bytes.length);
  out.put(bytes);
  return out.bytes();
}

/** Throws CorruptError where the bytes hold anything but exactly `length` edges. */
export function decodeBlock(bytes: Uint8Array, length: number, volts: boolean, leadStep: number): EdgeBlock {
  const input = new ByteReader(bytes);
  const ticks = new Float64Array(length);
  const lines = new Uint8Array(length);
  let tick = input.double();
  const step = input.double();
  if (!(Number.isInteger(tick) && Number.isInteger(step) && step > 0)) throw new CorruptError("a block's grid makes no sense");
  ticks[0] = tick;
  lines[0] = input.byte();
  const edges = new ByteReader(input.take(input.word()));
  let last = lines[0] & ~CUT;
  for (let i = 1; i < length; i++) {
    const value = edges.varint();
    // The remainder by bits where the number is small, by arithmetic where it is not.
    const changed = value < 0x80000000 ? value & 3 : value % 4;
    let steps = value < 0x80000000 ? value >>> 2 : (value - changed) / 4;
    if (value === 0) steps = edges.double();
    if (!(steps > 0)) throw new CorruptError("two edges stand at one instant");
    tick += steps * step;
    ticks[i] = tick;
    if (changed !== 0) {
      last ^= changed;
      lines[i] = last;
    } else {
      lines[i] = edges.byte();
      last = lines[i] & ~CUT;
    }
  }
  if (edges.left !== 0 || !Number.isInteger(tick)) throw new CorruptError("a block does not hold the edges that it says");
  const columns = volts ? decodeVolts(input, lines, length, leadStep) : null;
  if (input.left !== 0) throw new CorruptError("a block is longer than it should be");
  return { length, ticks, lines, volts: columns };
}

function decodeVolts(input: ByteReader, lines: Uint8Array, length: number, leadStep: number): VoltColumns {
  const columns: VoltColumns = {
    leadScl: new Float32Array(length),
    leadSda: new Float32Array(length),
    meanScl: new Float32Array(length),
    meanSda: new Float32Array(length),
  };
  const leads = new ByteReader(input.take(input.word()));
  const lead = () => {
    const value = leads.varint();
    return value === 0 ? Number.NaN : (value - 1) * leadStep;
  };
  let last = -1;
  for (let i = 0; i < length; i++) {
    const changed = last < 0 ? ALL_BITS : lines[i] ^ last;
    if (carriesLead(changed, SCL)) columns.leadScl[i] = lead();
    if (carriesLead(changed, SDA)) columns.leadSda[i] = lead();
    last = lines[i] & ~CUT;
  }
  const step = input.double();
  const means = new ByteReader(input.take(input.word()));
  const known = new Int32Array(4);
  for (let i = 0; i < length; i++) {
    for (let line = 0; line < 2; line++) {
      const at = 2 * line + ((lines[i] >> line) & 1);
      const value = means.varint();
      if (value > 0) known[at] += value % 2 === 0 ? -(value / 2) : (value - 1) / 2;
      (line === 0 ? columns.meanScl : columns.meanSda)[i] = value === 0 ? Number.NaN : known[at] * step;
    }
  }
  if (leads.left !== 0 || means.left !== 0) throw new CorruptError("a block does not hold the voltages that it says");
  return columns;
}
