import "server-only";
import { constants, gunzipSync } from "node:zlib";
import { type Result, refuse } from "@/lib/base/result";
import { isGzip } from "@/lib/engine/bytes/gzip";
import { type Format, sniff } from "@/lib/engine/samples/sniff";

/** Bytes of the beginning that are looked at. */
export const HEAD = 64 * 1024;

/** Which reader a stored file belongs to by its first bytes, gzip unwrapped; whether the rest decodes is the reader's question. */
export function typeOf(head: Uint8Array, name: string): Result<Format> {
  if (!isGzip(head)) return sniff(head, name);
  const inside = inflated(head);
  return inside === null || inside.length === 0
    ? refuse({
        code: "corrupt-gzip",
        message: `${name} begins like gzip, but nothing can be unpacked from it.`,
        advice: "Compress it again.",
        place: { byte: 0 },
      })
    : sniff(inside, name);
}

/** What a truncated gzip head unpacks to; DEFLATE expands at most 1032 times, so this stays below 66 MiB. */
function inflated(head: Uint8Array): Uint8Array | null {
  try {
    return gunzipSync(head, { finishFlush: constants.Z_SYNC_FLUSH }).subarray(0, HEAD);
  } catch {
    return null;
  }
}
