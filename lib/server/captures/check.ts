import "server-only";
import { createHash } from "node:crypto";
import { HEAD } from "./sniff";

/** What a stored object really holds. */
export interface Checked {
  readonly size: number;
  /** Of the whole, hexadecimal. */
  readonly sha256: string;
  /** Of each slice of `slice` bytes, hexadecimal. */
  readonly slices: readonly string[];
  /** The first bytes, at most 64 KiB. */
  readonly head: Uint8Array;
}

/** Reads an object once from end to end, in the memory of one chunk. */
export async function check(bytes: AsyncIterable<Uint8Array>, slice: number): Promise<Checked> {
  const whole = createHash("sha256");
  const slices: string[] = [];
  const head = new Uint8Array(HEAD);
  let part = createHash("sha256");
  let size = 0;
  let filled = 0;
  for await (const chunk of bytes) {
    whole.update(chunk);
    if (size < HEAD) head.set(chunk.subarray(0, HEAD - size), size);
    size += chunk.length;
    for (let at = 0; at < chunk.length; ) {
      const taken = Math.min(slice - filled, chunk.length - at);
      part.update(chunk.subarray(at, at + taken));
      at += taken;
      filled += taken;
      if (filled < slice) continue;
      slices.push(part.digest("hex"));
      part = createHash("sha256");
      filled = 0;
    }
  }
  if (filled > 0) slices.push(part.digest("hex"));
  return { size, sha256: whole.digest("hex"), slices, head: head.subarray(0, Math.min(size, HEAD)) };
}
