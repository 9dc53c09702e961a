// In: chunks of a body, cut anywhere. Out: regions that hold whole rows, each ending with a line end.

/** A longer row is no row of readings; it is set aside without being kept. */
const ROW_LIMIT = 1 << 20;

const CR = 13;
const LF = 10;

export class Regions {
  private carry = new Uint8Array(4096);
  private carried = 0;
  private discarding = false;

  /** `take`: whole rows, from `from` to `to`. */
  constructor(private readonly take: (bytes: Uint8Array, from: number, to: number) => void) {}

  push(chunk: Uint8Array): void {
    let from = 0;
    if (this.carried > 0 || this.discarding) {
      while (from < chunk.length && chunk[from] !== LF && chunk[from] !== CR) from += 1;
      if (from === chunk.length) {
        this.keep(chunk, 0, chunk.length);
        return;
      }
      from += 1;
      this.keep(chunk, 0, from);
      this.take(this.carry, 0, this.endCarry());
    }
    let end = chunk.length;
    while (end > from && chunk[end - 1] !== LF && chunk[end - 1] !== CR) end -= 1;
    if (end > from) this.take(chunk, from, end);
    if (end < chunk.length) this.keep(chunk, end, chunk.length);
  }

  /** The last row may lack its line end (RFC 4180 section 2, rule 2). */
  finish(): void {
    if (this.carried === 0 && !this.discarding) return;
    this.keep(new Uint8Array([LF]), 0, 1);
    this.take(this.carry, 0, this.endCarry());
  }

  private keep(bytes: Uint8Array, from: number, to: number): void {
    if (this.discarding || this.carried + to - from > ROW_LIMIT) {
      this.discarding = true;
      return;
    }
    if (this.carried + to - from > this.carry.length) {
      const larger = new Uint8Array(Math.max(this.carry.length * 2, this.carried + to - from));
      larger.set(this.carry.subarray(0, this.carried));
      this.carry = larger;
    }
    this.carry.set(bytes.subarray(from, to), this.carried);
    this.carried += to - from;
  }

  /** Length of the row in `carry`; a row over the limit becomes one that cannot be read. */
  private endCarry(): number {
    if (this.discarding) {
      this.discarding = false;
      this.carry[0] = 33;
      this.carry[1] = LF;
      this.carried = 2;
    }
    const length = this.carried;
    this.carried = 0;
    return length;
  }
}
