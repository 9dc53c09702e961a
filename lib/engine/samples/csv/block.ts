// In: rows one by one, as a scanner reads them. Out: the same rows in columns, some hundred at a time, so that who takes
// them is called once for all of them.

/** So few that their columns stay in the nearest cache. */
export const BLOCK_ROWS = 512;

/** Consecutive lines of the file that were rows. Reading `slot` of row `i` is `readings[i * width + slot]`. */
export class RowBlock {
  readonly capacity = BLOCK_ROWS;
  readonly ticks = new Float64Array(BLOCK_ROWS);
  readonly readings: Float64Array;
  length = 0;
  /** Line of the first row. */
  line = 0;

  /** `width`: readings of a row. */
  constructor(readonly width: number) {
    this.readings = new Float64Array(BLOCK_ROWS * width).fill(Number.NaN);
  }

  /** Copies the readings of one row to where rows are taken from one by one. */
  lift(row: number, values: Float64Array): void {
    const from = row * this.width;
    for (let slot = 0; slot < this.width; slot += 1) values[slot] = this.readings[from + slot];
  }
}
