// In: whole numbers. Out: a compact run of bytes, and back. Numbers below 2^53 take one byte for every seven bits, low bits
// first, the top bit of a byte saying that another follows.

/** Grows as needed; `bytes()` is what was written. */
export class ByteWriter {
  length = 0;
  private buffer: Uint8Array;

  constructor(size = 1024) {
    this.buffer = new Uint8Array(size);
  }

  /** Room for `count` more bytes; call before `varint` in a loop that writes at most that many. */
  reserve(count: number): void {
    if (this.length + count <= this.buffer.length) return;
    const next = new Uint8Array(Math.max(this.buffer.length * 2, this.length + count));
    next.set(this.buffer.subarray(0, this.length));
    this.buffer = next;
  }

  byte(value: number): void {
    this.reserve(1);
    this.buffer[this.length++] = value;
  }

  /** At most 8 bytes; room must have been reserved. */
  varint(value: number): void {
    let rest = value;
    while (rest >= 0x80000000) {
      this.buffer[this.length++] = (rest % 128) | 128;
      rest = Math.floor(rest / 128);
    }
    let small = rest | 0;
    while (small >= 128) {
      this.buffer[this.length++] = (small & 127) | 128;
      small >>>= 7;
    }
    this.buffer[this.length++] = small;
  }

  /** A number of either sign: 0, -1, 1, -2, ... as 0, 1, 2, 3, ... */
  zigzag(value: number): void {
    this.varint(value < 0 ? -2 * value - 1 : 2 * value);
  }

  double(value: number): void {
    this.reserve(8);
    new DataView(this.buffer.buffer).setFloat64(this.length, value, true);
    this.length += 8;
  }

  word(value: number): void {
    this.reserve(4);
    new DataView(this.buffer.buffer).setUint32(this.length, value, true);
    this.length += 4;
  }

  put(bytes: Uint8Array): void {
    this.reserve(bytes.length);
    this.buffer.set(bytes, this.length);
    this.length += bytes.length;
  }

  bytes(): Uint8Array<ArrayBuffer> {
    return this.buffer.slice(0, this.length);
  }
}

/** The bytes do not hold what they should; the reader of the archive turns it into a refusal. */
export class CorruptError extends Error {}

export class ByteReader {
  at = 0;

  constructor(private readonly buffer: Uint8Array) {}

  get left(): number {
    return this.buffer.length - this.at;
  }

  byte(): number {
    if (this.at >= this.buffer.length) throw new CorruptError("a block ends early");
    return this.buffer[this.at++];
  }

  varint(): number {
    const { buffer } = this;
    let byte = buffer[this.at++];
    if (byte < 128) return byte;
    let value = byte & 127;
    for (let shift = 7; shift < 28; shift += 7) {
      byte = buffer[this.at++];
      value |= (byte & 127) << shift;
      if (byte < 128) return value;
    }
    return this.long(value);
  }

  /** A number of more than four bytes, or one that runs past the end. */
  private long(low: number): number {
    let value = low;
    for (let scale = 2 ** 28; scale < 2 ** 56; scale *= 128) {
      const byte = this.byte();
      value += (byte & 127) * scale;
      if (byte < 128) return value;
    }
    throw new CorruptError("a number is too long");
  }

  zigzag(): number {
    const value = this.varint();
    return value % 2 === 0 ? value / 2 : -(value + 1) / 2;
  }

  double(): number {
    if (this.left < 8) throw new CorruptError("a block ends early");
    const value = new DataView(this.buffer.buffer, this.buffer.byteOffset).getFloat64(this.at, true);
    this.at += 8;
    return value;
  }

  word(): number {
    if (this.left < 4) throw new CorruptError("a block ends early");
    const value = new DataView(this.buffer.buffer, this.buffer.byteOffset).getUint32(this.at, true);
    this.at += 4;
    return value;
  }

  take(count: number): Uint8Array {
    if (this.left < count) throw new CorruptError("a block ends early");
    this.at += count;
    return this.buffer.subarray(this.at - count, this.at);
  }
}
