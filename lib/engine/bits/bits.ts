// In: edges (spikes shorter than tSP already taken out). Out: the landing "bits": START, repeated START, STOP and one entry
// per SCL pulse that carries a bit. A streaming landing: blocks are reused, and any transaction's bits can be made again
// from its edges. UM10204 3.1.3 - 3.1.5.

export const START = 0;
export const REPEATED_START = 1;
export const STOP = 2;
export const BIT = 3;
/** Decoding stopped here: the record was cut or a line became unknown. What stood open ends without a STOP. */
export const LOST = 4;

/** bits of `BitBlock.flags` */
/** SDA changed in the very tick in which SCL rose: the new value counts, set-up time is within one sample. */
export const SETUP_WITHIN_SAMPLE = 1;
/** The pulse stands in Hs-mode (after an Hs controller code and its NACK, until STOP). */
export const IN_HS = 2;
/** SDA changed in the very tick in which SCL fell: hold time is within one sample. */
export const HOLD_WITHIN_SAMPLE = 4;
/** No transaction is open: clocks of a transaction that began before the record, after a STOP, or of a bus clear. */
export const OUTSIDE = 8;

/** Struct of arrays; only the first `length` entries count. NaN in a time column means "not there". */
export interface BitBlock {
  length: number;
  readonly kind: Uint8Array;
  /** BIT: 0 or 1. Other kinds: 0. */
  readonly value: Uint8Array;
  readonly flags: Uint8Array;
  /** BIT: the SCL rise. START, REPEATED_START, STOP: the SDA change. LOST: the cut. */
  readonly tick: Float64Array;
  /** The SCL fall that began the low before this entry's SCL rise (for Sr and STOP: the low before the high they stand in). */
  readonly fall: Float64Array;
  /** The SCL rise of the high this entry stands in. For BIT equal to `tick`. For START: NaN. */
  readonly rise: Float64Array;
  /** BIT: the SCL fall that ends the high; NaN where the record ended first. START and Sr: the first SCL fall after. STOP: NaN. */
  readonly end: Float64Array;
  /** First and last SDA change inside that low (from `fall` to `rise`, both included); NaN where SDA did not change. */
  readonly sdaFirst: Float64Array;
  readonly sdaLast: Float64Array;
  /** Index of the edge (counted over the whole capture) that gives `tick`. */
  readonly edge: Float64Array;
  /** Volts only, else NaN: leads of the edges at fall, rise, end, sdaFirst, sdaLast (see VoltColumns). */
  readonly leads: BitLeads | null;
}

/** START, Sr, STOP: `sdaLast` is the lead of the SDA change that made the condition. */
export interface BitLeads {
  readonly fall: Float32Array;
  readonly rise: Float32Array;
  readonly end: Float32Array;
  readonly sdaFirst: Float32Array;
  readonly sdaLast: Float32Array;
  /** Mean voltage of SDA over the high of this bit, and of SCL over the low before it. */
  readonly sdaHigh: Float32Array;
  readonly sclLow: Float32Array;
}

/** A pulse shorter than tSP, reported and not acted on. */
export interface Spike {
  readonly line: "scl" | "sda";
  readonly tick: number;
  readonly width: number;
  readonly to: 0 | 1;
}
