// In: the layout and the axis. Out: what a scanner must know of a row: which cells are wanted, as what, and where instants come
// from.

import type { Dialect } from "./split";

/** What a wanted cell is read as: a level 0/1/2, a number (NaN unknown), or the row's instant. */
export const SKIP = 0;
export const LEVEL = 1;
export const VALUE = 2;
export const INSTANT = 3;

/** Where instants come from. tick = number x 10^power (exact), or number x factor where a factor is given. */
export interface Clockwork {
  /** Column of times or running numbers, or -1: the row's own number counts. */
  readonly column: number;
  readonly power: number;
  readonly factor: number | null;
  /** Added to every instant; for counted rows. */
  readonly start: number;
}

export interface ScanPlan {
  readonly dialect: Dialect;
  readonly width: number;
  /** Cells from here on must be empty. */
  readonly namedWidth: number;
  readonly firstLine: number;
  readonly clock: Clockwork;
  /** Per column: SKIP, LEVEL, VALUE or INSTANT. */
  readonly modes: Uint8Array;
  /** Per column: index in `values`. */
  readonly slots: Int32Array;
  /** Per column: power of ten that takes its numbers to volts; 0 elsewhere. */
  readonly powers: Int32Array;
  readonly values: Float64Array;
}
