// In: a gzip file's bytes. Out: the bytes of all its members (RFC 1952 2.2), inflated one after the other by the platform's
// own codec, which in browsers reads one member and refuses what follows. A member is taken to end where the next header
// stands and the four bytes before it (ISIZE, RFC 1952 2.3.1) say exactly how many bytes have come out, modulo 2^32; the
// codec then checks the member's own checksum.

/** ID1, ID2, CM = deflate, and FLG with its reserved bits clear. */
const HEADER = 4;
const TRAILER = 4;
/** Bytes that go in at once, so that little comes out before it is asked for. */
const SLICE = 65_536;
/** Output that may still be under way: a slice's, at deflate's best ratio of 1032 to 1, rounded up. */
const UNDER_WAY = 2 ** 27;
/** How long output may stay behind input before a header-like place counts as compressed data, in milliseconds. */
const PATIENCE = 1000;

export async function* inflateMembers(chunks: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  const ready: Uint8Array[] = [];
  let member = new Member(ready);
  // The newest bytes are held back: they may begin a header.
  let held = new Uint8Array(0);
  try {
    for await (const chunk of chunks) {
      const bytes = joined(held, chunk);
      let from = 0;
      for (let at = nextHeader(bytes, 1); at >= 0; at = nextHeader(bytes, at + 1)) {
        yield* fed(member, bytes.subarray(from, at), ready);
        from = at;
        if (!(await member.endsHere())) continue;
        await member.close();
        yield* ready.splice(0);
        member = new Member(ready);
      }
      const end = Math.max(from, bytes.length - HEADER + 1);
      yield* fed(member, bytes.subarray(from, end), ready);
      held = bytes.slice(end);
    }
    await member.write(held);
    await member.close();
    yield* ready.splice(0);
  } finally {
    await member.abandon();
  }
}

async function* fed(member: Member, bytes: Uint8Array<ArrayBuffer>, ready: Uint8Array[]): AsyncGenerator<Uint8Array> {
  for (let from = 0; from < bytes.length; from += SLICE) {
    await member.write(bytes.subarray(from, Math.min(bytes.length, from + SLICE)));
    yield* ready.splice(0);
  }
}

function joined(held: Uint8Array, chunk: Uint8Array): Uint8Array<ArrayBuffer> {
  const bytes = new Uint8Array(held.length + chunk.length);
  bytes.set(held);
  bytes.set(chunk, held.length);
  return bytes;
}

/** The first whole header at `from` or after it, or -1. */
function nextHeader(bytes: Uint8Array, from: number): number {
  for (let at = bytes.indexOf(0x1f, from); at >= 0 && at + HEADER <= bytes.length; at = bytes.indexOf(0x1f, at + 1)) {
    if (bytes[at + 1] === 0x8b && bytes[at + 2] === 8 && (bytes[at + 3] & 0xe0) === 0) return at;
  }
  return -1;
}

/** One member on its way through the codec. */
class Member {
  private produced = 0;
  private readonly writer: WritableStreamDefaultWriter<BufferSource>;
  private readonly reader: ReadableStreamDefaultReader<Uint8Array>;
  private readonly drained: Promise<void>;
  /** The newest bytes that went in. */
  private readonly last = new Uint8Array(TRAILER);
  private failure: { readonly error: unknown } | null = null;

  constructor(private readonly ready: Uint8Array[]) {
    const codec = new DecompressionStream("gzip");
    this.writer = codec.writable.getWriter();
    this.reader = codec.readable.getReader();
    this.drained = this.drain();
  }

  private async drain(): Promise<void> {
    try {
      for (;;) {
        const next = await this.reader.read();
        if (next.done) return;
        this.produced += next.value.length;
        this.ready.push(next.value);
      }
    } catch (error) {
      this.failure = { error };
    }
  }

  async write(bytes: Uint8Array<ArrayBuffer>): Promise<void> {
    this.note(bytes);
    try {
      await this.writer.write(bytes);
    } catch (error) {
      throw this.failure?.error ?? error;
    }
  }

  private note(bytes: Uint8Array): void {
    const kept = Math.max(0, TRAILER - bytes.length);
    this.last.copyWithin(0, TRAILER - kept);
    this.last.set(bytes.subarray(Math.max(0, bytes.length - TRAILER)), kept);
  }

  /** Whether what went in so far ends with the length of what comes out. */
  async endsHere(): Promise<boolean> {
    const stated = new DataView(this.last.buffer).getUint32(0, true);
    const until = performance.now() + PATIENCE;
    while (this.failure === null && this.produced % 2 ** 32 !== stated) {
      const missing = (stated - this.produced) >>> 0;
      if (missing > UNDER_WAY || performance.now() > until) return false;
      await new Promise((resolve) => setTimeout(resolve, 1));
    }
    return this.failure === null;
  }

  async close(): Promise<void> {
    await this.writer.close().catch((error: unknown) => {
      this.failure ??= { error };
    });
    await this.drained;
    if (this.failure !== null) throw this.failure.error;
  }

  async abandon(): Promise<void> {
    await this.writer.abort().catch(() => undefined);
    await this.reader.cancel().catch(() => undefined);
  }
}
