import "server-only";
import { Readable, type Transform } from "node:stream";
import { createGunzip, createGzip } from "node:zlib";
import type { Host } from "@/lib/engine/bytes/source";

/** What the engine needs of a server process. */
export const host: Host = {
  inflate: (chunks) => through(chunks, createGunzip()),
  deflate: (chunks) => through(chunks, createGzip()),
};

async function* through(chunks: AsyncIterable<Uint8Array>, codec: Transform): AsyncGenerator<Uint8Array> {
  const input = Readable.from(copies(chunks), { objectMode: false });
  // pipe() does not hand errors on.
  input.on("error", (error) => codec.destroy(error));
  try {
    yield* input.pipe(codec) as AsyncIterable<Uint8Array>;
  } finally {
    input.destroy();
    codec.destroy();
  }
}

/** Sources may use their buffer again for the next chunk; a stream keeps chunks waiting. */
async function* copies(chunks: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  for await (const chunk of chunks) yield chunk.slice();
}
