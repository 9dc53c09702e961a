// In: samples or value changes. Out: the landing "edges", the instants at which SCL, SDA or both changed.
// One entry per instant: changes of both lines in one tick are one event (UM10204 3.1.4 needs their order to tell
// START from data, and within one tick there is none).

/** Bits of `EdgeBlock.lines`: levels after the event. A line that is unknown has its level bit clear. */
export const SCL = 1;
export const SDA = 2;
export const SCL_UNKNOWN = 4;
export const SDA_UNKNOWN = 8;
/** The record was cut just before this event (rows lost, $dumpoff, an untrusted span): nothing is decoded across it. */
export const CUT = 16;

/**
 * Struct of arrays; only the first `length` entries count. The very first entry of a capture is its initial state at the
 * first sample; every later entry differs from the one before in levels, or has CUT set. Ticks increase strictly.
 */
export interface EdgeBlock {
  readonly length: number;
  /** Instant of each event, ticks of the capture's Timebase. */
  readonly ticks: Float64Array;
  /** Levels after the event, bits above. */
  readonly lines: Uint8Array;
  /** Only for captures in volts. */
  readonly volts: VoltColumns | null;
}

/**
 * For captures in volts the comparator decides a rise at VIH (0.7 VDD) and a fall at VIL (0.3 VDD), crossing times
 * interpolated between samples. `lead` is how much earlier the line crossed the other threshold, so it is tr or tf of that
 * edge itself: a rise crosses VIL at tick - lead. 0 where that line did not change at this event; NaN where unknown.
 */
export interface VoltColumns {
  readonly leadScl: Float32Array;
  readonly leadSda: Float32Array;
  /** Mean voltage of each line from this event to the next, samples in transition left out; NaN where no sample settled. */
  readonly meanScl: Float32Array;
  readonly meanSda: Float32Array;
}

/**
 * What a line in volts did without changing its level: a visit between the thresholds (rose past VIL but not VIH, or fell past VIH but
 * not VIL), or a graze, whose extreme is not below VIH: it left the settled high and came back without reaching VIH.
 */
export interface Excursion {
  readonly line: "scl" | "sda";
  readonly tick: number;
  readonly width: number;
  readonly extreme_v: number;
}
