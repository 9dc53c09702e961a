// In: nothing. Out: the reusable block that the bit decoder fills, and its emptying to the listener.

import type { BitBlock, BitLeads } from "./bits";

/** Entries a block holds before it is handed on: large enough to amortise the call, small enough to stay in cache. */
export const BIT_BLOCK_CAPACITY = 8192;

export function newBitBlock(volts: boolean): BitBlock {
  const n = BIT_BLOCK_CAPACITY;
  return {
    length: 0,
    kind: new Uint8Array(n),
    value: new Uint8Array(n),
    flags: new Uint8Array(n),
    tick: new Float64Array(n),
    fall: new Float64Array(n),
    rise: new Float64Array(n),
    end: new Float64Array(n),
    sdaFirst: new Float64Array(n),
    sdaLast: new Float64Array(n),
    edge: new Float64Array(n),
    leads: volts ? newLeads(n) : null,
  };
}

function newLeads(n: number): BitLeads {
  return {
    fall: new Float32Array(n),
    rise: new Float32Array(n),
    end: new Float32Array(n),
    sdaFirst: new Float32Array(n),
    sdaLast: new Float32Array(n),
    sdaHigh: new Float32Array(n),
    sclLow: new Float32Array(n),
  };
}
