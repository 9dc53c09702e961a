// In: edges of an open transaction on a one-threshold capture, from the middle of an SCL low on. Out: bits of lawful traffic:
// SDA changes once or not at all, SCL rises, SCL falls. Three entries at a time and everything in locals; stops at whatever else
// comes, for the conditions to take. Nearly all edges of a long capture pass here, so there is one branch a bit, and it is
// foreseeable: whether SDA changed is not, and enters as a number.

import { type EdgeBlock, SCL, SDA } from "../samples/edges";
import { BIT, type BitBlock } from "./bits";

/** Added to a time: nothing where there is one, and then it is gone where there is none. Indexed by whether SDA changed. */
const HOLE = Float64Array.of(Number.NaN, 0);

/** What the walk knows between two entries, as far as bits of lawful traffic change it. */
export interface PlainState {
  /** SDA's level; SCL is low and both are known. */
  lines: number;
  /** The fall that began the low under way, the last rise, and that rise's edge. */
  fall: number;
  rise: number;
  riseEdge: number;
}

/**
 * Appends bits to `out` until `most` of them are there or something else than a plain bit comes.
 * @param flags flags that every bit here carries
 * @returns the entry at which the low that is then under way goes on
 */
export function plainBits(
  state: PlainState,
  out: BitBlock,
  block: EdgeBlock,
  from: number,
  to: number,
  firstEdge: number,
  most: number,
  flags: number,
): number {
  const { ticks, lines: levels } = block;
  const { kind, value, flags: flagged, tick, fall: fallen, rise, end, sdaFirst, sdaLast, edge } = out;
  const until = to - 2;
  const full = out.length + most;
  let { lines: sda, fall } = state;
  let i = from;
  let n = out.length;
  while (i < until && n < full) {
    const next = levels[i];
    const moved = (next & SCL) ^ SCL;
    const at = i + moved;
    // SDA changes or SCL rises; SCL is risen; SCL falls: anything else leaves a bit standing.
    const odd = (next ^ sda ^ (SCL + moved)) | (levels[at] ^ (next | SCL)) | (levels[at + 1] ^ (next & SDA));
    if (odd !== 0) break;
    const rose = ticks[at];
    const changed = ticks[i] + HOLE[moved];
    kind[n] = BIT;
    value[n] = next >> 1;
    flagged[n] = flags;
    tick[n] = rose;
    fallen[n] = fall;
    rise[n] = rose;
    fall = ticks[at + 1];
    end[n] = fall;
    sdaFirst[n] = changed;
    sdaLast[n] = changed;
    edge[n] = firstEdge + at;
    n++;
    sda = next & SDA;
    i = at + 2;
  }
  if (n > out.length) {
    state.lines = sda;
    state.fall = fall;
    state.rise = rise[n - 1];
    state.riseEdge = edge[n - 1];
    out.length = n;
  }
  return i;
}
