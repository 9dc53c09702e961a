// In: the identifier codes of the nets that somebody watches. Out: the net of a code in a buffer, found by a hash of its
// bytes (made by whoever walks over the code: h = (h xor byte) x PRIME in 32 bits, the FNV-1a step).

/** Codes are counted up in 94 characters, so a small factor would crowd them; this one is FNV's. */
export const PRIME = 0x01000193;

/** Identifier codes that somebody watches, found by a hash of their bytes. */
export class CodeTable {
  private readonly mask: number;
  /** Net number plus one, 0 where empty. */
  private readonly slots: Int32Array;
  private readonly hashes: Int32Array;
  /** 1 for every byte that a watched code begins with, and for white space, which is no code. */
  readonly first = new Uint8Array(256).fill(1, 0, 33);
  private readonly codes: Uint8Array[] = [];

  constructor(codes: readonly string[]) {
    let size = 256;
    while (size < 4 * codes.length) size *= 2;
    this.mask = size - 1;
    this.slots = new Int32Array(size);
    this.hashes = new Int32Array(size);
    codes.forEach((code, net) => {
      const bytes = Uint8Array.from(code, (c) => c.charCodeAt(0));
      this.codes.push(bytes);
      this.first[bytes[0]] = 1;
      let hash = 0;
      for (const c of bytes) hash = Math.imul(hash ^ c, PRIME);
      let at = (hash ^ (hash >>> 16)) & this.mask;
      while (this.slots[at] !== 0) at = (at + 1) & this.mask;
      this.slots[at] = net + 1;
      this.hashes[at] = hash;
    });
  }

  /** The net of the code in bytes `from` to `to`, or -1. */
  find(bytes: Uint8Array, from: number, to: number, hash: number): number {
    let at = (hash ^ (hash >>> 16)) & this.mask;
    for (;;) {
      const slot = this.slots[at];
      if (slot === 0) return -1;
      if (this.hashes[at] === hash && same(this.codes[slot - 1], bytes, from, to)) return slot - 1;
      at = (at + 1) & this.mask;
    }
  }
}

function same(code: Uint8Array, bytes: Uint8Array, from: number, to: number): boolean {
  if (code.length !== to - from) return false;
  for (let i = 0; i < code.length; i++) if (code[i] !== bytes[from + i]) return false;
  return true;
}

/** Index after a vector change that certainly nobody watches, or 0: most vectors of a dump need no further look. */
export function unwatched(bytes: Uint8Array, i: number, to: number, first: Uint8Array): number {
  let j = i + 2;
  while (bytes[j] > 32) j++;
  // Only the usual single space: anything else, or a code in the next chunk, takes the careful way.
  if (++j >= to || first[bytes[j]] === 1) return 0;
  while (bytes[j] > 32) j++;
  return j;
}
