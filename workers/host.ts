// What the engine needs of its host, on web standards alone, so the same file serves the browser's worker and Node 20.

import type { ByteSource, Host } from "../lib/engine/bytes/source";
import { inflateMembers } from "./members";

export const host: Host = {
  inflate: inflateMembers,
  deflate: (chunks) => through(chunks, new CompressionStream("gzip")),
};

async function* through(
  chunks: AsyncIterable<Uint8Array>,
  codec: ReadableWritablePair<Uint8Array, BufferSource>,
): AsyncGenerator<Uint8Array> {
  const input = chunks[Symbol.asyncIterator]();
  const plain = new ReadableStream<BufferSource>({
    async pull(controller) {
      const next = await input.next();
      // A copy, because sources may reuse their read buffer for the next chunk.
      if (next.done) controller.close();
      else controller.enqueue(next.value.slice());
    },
    async cancel() {
      await input.return?.();
    },
  });
  yield* streamed(plain.pipeThrough(codec));
}

async function* streamed(stream: ReadableStream<Uint8Array>): AsyncGenerator<Uint8Array> {
  const reader = stream.getReader();
  try {
    for (;;) {
      const next = await reader.read();
      if (next.done) return;
      yield next.value;
    }
  } finally {
    await reader.cancel().catch(() => undefined);
  }
}

/** The first chunk is short: sniffing and the head need no more, and the first edges leave at once. */
const FIRST_BYTES = 256 * 1024;
/** Later ones are long, so that what is done once a chunk is done seldom. */
const CHUNK_BYTES = 1024 * 1024;

/** A picked file, or any Blob. Its first chunk is read once and kept: a file is opened several times before it is read through. */
export function fileSource(file: Blob, name: string): ByteSource {
  let first: Promise<ArrayBuffer> | null = null;
  return {
    name,
    size: file.size,
    async *open() {
      first ??= file.slice(0, FIRST_BYTES).arrayBuffer();
      const bytes = new Uint8Array(await first);
      if (bytes.length > 0) yield bytes;
      if (file.size > bytes.length) yield* fileChunks(file.slice(bytes.length));
    },
  };
}

/**
 * Reads through `stream()`, which is the fastest way in Chromium, into one buffer that is used again and again where the
 * browser can do that: half the cost of a new buffer for every chunk, and nothing is left to sweep up.
 */
async function* fileChunks(file: Blob): AsyncGenerator<Uint8Array> {
  const stream = file.stream();
  const reader = byteReader(stream);
  if (reader === null) {
    yield* streamed(stream);
    return;
  }
  try {
    let buffer = new ArrayBuffer(CHUNK_BYTES);
    for (let ended = false; !ended; ) {
      let filled = 0;
      while (!ended && filled < CHUNK_BYTES) {
        const next = await reader.read(new Uint8Array(buffer, filled));
        if (next.value === undefined) return;
        ({ buffer } = next.value);
        filled += next.value.length;
        ended = next.done;
      }
      if (filled > 0) yield new Uint8Array(buffer, 0, filled);
    }
  } finally {
    await reader.cancel().catch(() => undefined);
  }
}

/** Null where the browser's files are not streams of bytes. */
function byteReader(stream: ReadableStream<Uint8Array<ArrayBuffer>>): ReadableStreamBYOBReader | null {
  try {
    return stream.getReader({ mode: "byob" });
  } catch {
    return null;
  }
}
