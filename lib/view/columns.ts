// In: how many entries each appended block holds. Out: which block an entry lies in, in constant time. Blocks may be of any
// length: the first ones of a capture are small, so that rows appear at once, the later ones hold about a million entries.

const SPACING = 1024;

/** Finds the block of an entry: one table look-up, then a step or two. */
export class BlockIndex {
  #starts: number[] = [];
  /** For every 1024th entry the block that holds it. */
  #table: number[] = [];
  #total = 0;

  get total(): number {
    return this.#total;
  }

  get blocks(): number {
    return this.#starts.length;
  }

  append(length: number): void {
    if (length === 0) throw new RangeError("an empty block has no place in the index");
    const block = this.#starts.length;
    this.#starts.push(this.#total);
    this.#total += length;
    while (this.#table.length * SPACING < this.#total) this.#table.push(block);
  }

  /** Number of the block that holds entry `index`, 0 <= index < total. */
  block(index: number): number {
    let low = this.#table[Math.floor(index / SPACING)];
    const next = this.#table[Math.floor(index / SPACING) + 1];
    let high = next === undefined ? this.#starts.length - 1 : next;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (this.#starts[middle] <= index) low = middle;
      else high = middle - 1;
    }
    return low;
  }

  start(block: number): number {
    return this.#starts[block];
  }
}
