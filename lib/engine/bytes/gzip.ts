// In: a ByteSource as stored. Out: the same file's bytes inflated, with progress still counted in stored bytes.
// Member format and magic: RFC 1952 2.3.1 (ID1 = 1F, ID2 = 8B, CM = 8 deflate).

import { ok, type Problem, type Result, refuse } from "../../base/result";
import type { ByteSource, Host } from "./source";

export function isGzip(head: Uint8Array): boolean {
  return head.length >= 3 && head[0] === 0x1f && head[1] === 0x8b && head[2] === 8;
}

/** A source of the inflated bytes. Errors of the stream carry GZIP_BROKEN so that readers can tell them from our own. */
export function inflated(source: ByteSource, host: Host): ByteSource {
  let stored = 0;
  async function* counted(): AsyncGenerator<Uint8Array> {
    for await (const chunk of source.open()) {
      stored += chunk.length;
      yield chunk;
    }
  }
  async function* open(): AsyncGenerator<Uint8Array> {
    stored = 0;
    const chunks = host.inflate(counted())[Symbol.asyncIterator]();
    try {
      for (;;) {
        const next = await step(chunks, () => stored);
        if (next.done) return;
        yield next.value;
      }
    } finally {
      await chunks.return?.();
    }
  }
  return { name: source.name, size: null, open, consumed: () => stored };
}

async function step(chunks: AsyncIterator<Uint8Array>, stored: () => number): Promise<IteratorResult<Uint8Array>> {
  try {
    return await chunks.next();
  } catch (error) {
    throw new CompressedDataError(stored(), error instanceof Error ? error.message : String(error));
  }
}

/** The compressed data is corrupt or cut off. Readers turn it into a Problem with `compressedProblem`. */
export class CompressedDataError extends Error {
  readonly storedBytes: number;
  constructor(storedBytes: number, detail: string) {
    super(detail);
    this.name = "CompressedDataError";
    this.storedBytes = storedBytes;
  }
}

export function compressedProblem(error: CompressedDataError): Problem {
  return {
    code: "gzip-broken",
    message: `The file is gzip-compressed, and the compressed data is corrupt or ends early (near stored byte ${error.storedBytes}).`,
    advice: "Compress the export again, or give the uncompressed file.",
    place: { byte: error.storedBytes },
  };
}

/** Runs a reading step and turns broken compression into a refusal; every other error is passed on. */
export async function guardInflate<T>(run: () => Promise<Result<T>>): Promise<Result<T>> {
  try {
    return await run();
  } catch (error) {
    if (error instanceof CompressedDataError) return refuse(compressedProblem(error));
    throw error;
  }
}

/** The first bytes of a source, at most `limit`; shorter only where the file is. */
export async function firstBytes(source: ByteSource, limit: number): Promise<Result<Uint8Array>> {
  return guardInflate(async () => {
    const head = new Uint8Array(limit);
    let length = 0;
    for await (const chunk of source.open()) {
      const part = chunk.subarray(0, limit - length);
      head.set(part, length);
      length += part.length;
      if (length === limit) break;
    }
    return ok(head.subarray(0, length));
  });
}
