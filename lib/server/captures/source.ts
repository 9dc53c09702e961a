import "server-only";
import type { ByteSource } from "@/lib/engine/bytes/source";
import { store } from "./store";

/** The first piece is small: sniffing and the head need no more. The same lengths as a file on disk is read in. */
const FIRST = 256 * 1024;
const PIECE = 4 * 1024 * 1024;

/** A stored file as the engine's byte source. */
export function storedSource(key: string, name: string, size: number): ByteSource {
  return { name, size, open: () => pieces(key) };
}

/** Storage delivers crumbs of any length; the engine gets few and large pieces in one buffer that is used again. */
async function* pieces(key: string): AsyncGenerator<Uint8Array> {
  let buffer = new Uint8Array(FIRST);
  let filled = 0;
  for await (const crumb of await store().open(key)) {
    for (let at = 0; at < crumb.length; ) {
      const taken = Math.min(buffer.length - filled, crumb.length - at);
      buffer.set(crumb.subarray(at, at + taken), filled);
      at += taken;
      filled += taken;
      if (filled < buffer.length) continue;
      yield buffer;
      filled = 0;
      if (buffer.length < PIECE) buffer = new Uint8Array(PIECE);
    }
  }
  if (filled > 0) yield buffer.subarray(0, filled);
}
