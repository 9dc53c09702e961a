// A file on disk as the engine's byte source. Node only.

import { open, stat } from "node:fs/promises";
import type { ByteSource } from "../lib/engine/bytes/source";

const READ_BYTES = 4 * 1024 * 1024;
/** The first read is small: sniffing and the head need no more, and the first edges leave at once. */
const FIRST_READ_BYTES = 256 * 1024;

/** Rejects where the path cannot be read (ENOENT, EACCES, EISDIR), before anything is decoded. */
export async function pathSource(path: string, name: string = path): Promise<ByteSource> {
  const facts = await stat(path);
  if (facts.isDirectory()) throw Object.assign(new Error(`${path} is a folder, not a file`), { code: "EISDIR" });
  return { name, size: facts.isFile() ? facts.size : null, open: () => read(path) };
}

/** One buffer is reused for every chunk, as ByteSource allows. */
async function* read(path: string): AsyncGenerator<Uint8Array> {
  const file = await open(path, "r");
  try {
    let buffer = new Uint8Array(FIRST_READ_BYTES);
    for (;;) {
      const { bytesRead } = await file.read(buffer, 0, buffer.length, null);
      if (bytesRead === 0) return;
      yield buffer.subarray(0, bytesRead);
      if (buffer.length < READ_BYTES) buffer = new Uint8Array(buffer.length * 4);
    }
  } finally {
    await file.close();
  }
}
