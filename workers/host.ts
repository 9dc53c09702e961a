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

/** A picked file, or any Blob. Reads through `stream()`, which is the fastest way in Chromium. */
export function fileSource(file: Blob, name: string): ByteSource {
  return { name, size: file.size, open: () => streamed(file.stream()) };
}
