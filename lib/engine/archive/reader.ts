// In: an edge archive as a ByteSource. Out: an opened capture, the same contract as the readers of CSV and VCD keep, so a
// shared case opens through the same path as the file it came from.

import { ok, type Problem, type Result, refuse } from "../../base/result";
import type { ByteSource, Host } from "../bytes/source";
import { decode } from "../bytes/text";
import type { CaptureHead, CaptureTail, EdgeSink, Opened } from "../samples/reader";
import { BLOCK_EDGES, decodeBlock } from "./block";
import { ByteWriter, CorruptError } from "./bytes";
import { END, FRAME_BYTES, HeadSchema, KIND, leadStepOf, MAGIC, PAYLOAD, TailSchema } from "./format";

/** Whether a file is an edge archive, of this or another version. */
export function isArchive(start: Uint8Array): boolean {
  return start.length >= MAGIC.length && MAGIC.every((byte, at) => at === 6 || byte === start[at]);
}

interface Frame {
  readonly kind: number;
  readonly lane: number;
  readonly entries: number;
  readonly at: number;
  readonly stored: Uint8Array;
}

export async function openArchive(source: ByteSource, host: Host): Promise<Opened> {
  return guarded(source.name, async () => {
    const input = new Intake(source);
    try {
      await begin(input);
      const first = await nextFrame(input);
      if (first.kind !== KIND.head) throw new CorruptError("the head is missing");
      const head: CaptureHead = HeadSchema.parse(json(await inflate(first.stored, host)));
      return ok({ head, read: (sink: EdgeSink) => guarded(source.name, () => read(source, host, head, sink)) });
    } finally {
      await input.close();
    }
  });
}

async function read(source: ByteSource, host: Host, head: CaptureHead, sink: EdgeSink): Promise<Result<CaptureTail>> {
  const input = new Intake(source);
  const seen: number[] = [];
  const lastTick = [0, ...head.taps.map(() => 0)].fill(Number.NEGATIVE_INFINITY);
  const leadStep = leadStepOf(head);
  try {
    await begin(input);
    await nextFrame(input);
    for (;;) {
      const frame = await nextFrame(input);
      if (frame.kind === KIND.tail) {
        const { tail, index } = TailSchema.parse(json(await inflate(frame.stored, host)));
        await end(input, frame);
        if (index.length !== seen.length || index.some((entry, i) => entry[1] !== seen[i]))
          throw new CorruptError("the index does not match");
        return ok(tail);
      }
      if (frame.kind !== KIND.edges || frame.lane > head.taps.length)
        throw new CorruptError(`there is a frame of unknown kind ${frame.kind}`);
      if (frame.entries < 1 || frame.entries > BLOCK_EDGES) throw new CorruptError(`a block of ${frame.entries} edges`);
      seen.push(frame.at);
      const volts = frame.lane === 0 && head.levels === "volts";
      const block = decodeBlock(await inflate(frame.stored, host), frame.entries, volts, leadStep);
      if (!(block.ticks[0] > lastTick[frame.lane])) throw new CorruptError("blocks are out of order");
      lastTick[frame.lane] = block.ticks[block.length - 1];
      if (frame.lane === 0) sink.edges(block);
      else sink.tap(frame.lane - 1, block);
      sink.progress(source.consumed?.() ?? input.at);
    }
  } catch (error) {
    throw located(error, input.at);
  } finally {
    await input.close();
  }
}

async function begin(input: Intake): Promise<void> {
  const magic = await input.take(MAGIC.length);
  if (!isArchive(magic)) throw new CorruptError("it does not begin as an edge archive does");
  if (magic[6] !== MAGIC[6]) throw new VersionError(magic[6]);
}

async function nextFrame(input: Intake): Promise<Frame> {
  const at = input.at;
  const fields = await input.take(FRAME_BYTES);
  const view = new DataView(fields.buffer, fields.byteOffset, FRAME_BYTES);
  const size = view.getUint32(6, true);
  if (size > PAYLOAD) throw new CorruptError(`a frame of ${size} bytes`);
  const [kind, lane, entries] = [fields[0], fields[1], view.getUint32(2, true)];
  return { kind, lane, entries, at, stored: await input.take(size) };
}

async function end(input: Intake, tail: Frame): Promise<void> {
  const bytes = await input.take(4 + END.length);
  const length = new DataView(bytes.buffer, bytes.byteOffset, 4).getUint32(0, true);
  if (length !== input.at - 8 - tail.at || END.some((byte, i) => bytes[4 + i] !== byte))
    throw new CorruptError("its end is damaged");
}

async function inflate(stored: Uint8Array, host: Host): Promise<Uint8Array> {
  const out = new ByteWriter(stored.length * 3 + 64);
  async function* once(): AsyncGenerator<Uint8Array> {
    yield stored;
  }
  try {
    for await (const chunk of host.inflate(once())) {
      out.put(chunk);
      if (out.length > PAYLOAD) throw new CorruptError("a block inflates to more than any block of ours");
    }
  } catch (error) {
    if (error instanceof CorruptError) throw error;
    throw new CorruptError(`a block does not inflate (${error instanceof Error ? error.message : String(error)})`);
  }
  return out.bytes();
}

function json(bytes: Uint8Array): unknown {
  try {
    return JSON.parse(decode(bytes, "utf-8"));
  } catch {
    throw new CorruptError("its head or tail is not what it should be");
  }
}

class VersionError extends Error {
  constructor(readonly version: number) {
    super(`version ${version}`);
  }
}

/** Keeps where a fault was met with the fault. */
class LocatedError extends Error {
  constructor(
    readonly fault: unknown,
    readonly at: number,
  ) {
    super("located");
  }
}

function located(error: unknown, at: number): unknown {
  return isFault(error) ? new LocatedError(error, at) : error;
}

const isFault = (error: unknown) =>
  error instanceof CorruptError ||
  error instanceof ShortError ||
  error instanceof VersionError ||
  (error instanceof Error && error.name.endsWith("ZodError"));

/** Turns faults of the archive into refusals; every other error (a listener that stops the reading, our own) passes. */
async function guarded<T>(name: string, run: () => Promise<Result<T>>): Promise<Result<T>> {
  try {
    return await run();
  } catch (error) {
    const fault = error instanceof LocatedError ? error.fault : error;
    if (!isFault(fault)) throw error;
    return refuse(problemOf(name, fault, error instanceof LocatedError ? error.at : 0));
  }
}

function problemOf(name: string, fault: unknown, at: number): Problem {
  if (fault instanceof ShortError) {
    return {
      code: "archive-truncated",
      message: `The edge archive ${name} ends early, at byte ${fault.at}.`,
      advice: "It was not stored or fetched completely. Open it again; if that fails, make it again from the original file.",
      place: { byte: fault.at },
    };
  }
  if (fault instanceof VersionError) {
    return {
      code: "archive-version",
      message: `The edge archive ${name} is of version ${fault.version}, which this program does not know; it knows version ${MAGIC[6]}.`,
      advice: "Open it with a newer version of Firstlow.",
      place: { byte: 6 },
    };
  }
  const what = fault instanceof CorruptError ? fault.message : "its head or tail is not what it should be";
  return {
    code: "archive-corrupt",
    message: `The edge archive ${name} is damaged near byte ${at}: ${what}.`,
    advice: "Make it again from the original file.",
    place: { byte: at },
  };
}

/** The source ended where more was due. */
class ShortError extends Error {
  constructor(readonly at: number) {
    super("short");
  }
}

/** Exact numbers of bytes from chunks of any length. */
class Intake {
  at = 0;
  private readonly chunks: AsyncIterator<Uint8Array>;
  private rest: Uint8Array = new Uint8Array(0);

  constructor(source: ByteSource) {
    this.chunks = source.open()[Symbol.asyncIterator]();
  }

  async take(count: number): Promise<Uint8Array> {
    if (this.rest.length >= count) return this.cut(count);
    const out = new ByteWriter(Math.min(count, 1 << 20));
    while (out.length < count) {
      if (this.rest.length === 0) {
        const next = await this.chunks.next();
        if (next.done) throw new ShortError(this.at);
        this.rest = next.value;
      }
      out.put(this.cut(Math.min(count - out.length, this.rest.length)));
    }
    return out.bytes();
  }

  async close(): Promise<void> {
    await this.chunks.return?.();
  }

  private cut(count: number): Uint8Array {
    const part = this.rest.subarray(0, count);
    this.rest = this.rest.subarray(count);
    this.at += count;
    return part;
  }
}
