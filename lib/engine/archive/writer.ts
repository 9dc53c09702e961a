// In: a capture's head, its edges as they are read, its tail. Out: the edge archive, in parts to be joined in order.

import type { Host } from "../bytes/source";
import type { EdgeBlock, VoltColumns } from "../samples/edges";
import type { CaptureHead, CaptureTail } from "../samples/reader";
import { BLOCK_EDGES, encodeBlock } from "./block";
import { ByteWriter } from "./bytes";
import { END, FRAME_BYTES, type FrameIndex, KIND, leadStepOf, MAGIC, meanStepOf } from "./format";
import { utf8 } from "./text";

export interface ArchiveWriter {
  edges(block: EdgeBlock): void;
  tap(index: number, block: EdgeBlock): void;
  /** Everything written, in order; rejects where compression failed. Nothing may be written after it. */
  finish(tail: CaptureTail): Promise<Uint8Array<ArrayBuffer>[]>;
}

/** Edges of the first block: few, so that whoever opens the archive sees the first rows at once. */
const FIRST_EDGES = 1 << 16;

export function createArchiveWriter(head: CaptureHead, deflate: Host["deflate"]): ArchiveWriter {
  const parts: Uint8Array<ArrayBuffer>[] = [MAGIC.slice()];
  const index: FrameIndex[number][] = [];
  const leadStep = leadStepOf(head);
  const meanStep = meanStepOf(head);
  let offset = MAGIC.length;
  let first = true;
  // Blocks are compressed one after the other, while the next ones are still being read.
  let queue: Promise<void> = Promise.resolve();

  function frame(kind: number, lane: number, entries: number, payload: Uint8Array, firstTick: number): void {
    queue = queue.then(async () => {
      const stored = await joined(deflate(once(payload)));
      const out = new ByteWriter(FRAME_BYTES);
      out.byte(kind);
      out.byte(lane);
      out.word(entries);
      out.word(stored.length);
      parts.push(out.bytes(), stored);
      if (kind === KIND.edges) index.push([lane, offset, FRAME_BYTES + stored.length, entries, firstTick]);
      offset += FRAME_BYTES + stored.length;
    });
    // Whoever calls `finish` sees the failure; until then it is not an unhandled one.
    queue.catch(() => undefined);
  }

  const lanes = [new Lane(head.levels === "volts"), ...head.taps.map(() => new Lane(false))];

  function flush(): void {
    // All lanes at once, so that taps and bus stay in step for whoever reads the stream.
    lanes.forEach((lane, number) => {
      if (lane.length > 0) frame(KIND.edges, number, lane.length, encodeBlock(lane.block(), leadStep, meanStep), lane.ticks[0]);
      lane.length = 0;
    });
    first = false;
  }

  function add(lane: Lane, block: EdgeBlock): void {
    for (let from = 0; from < block.length; ) {
      const room = (first ? FIRST_EDGES : BLOCK_EDGES) - lane.length;
      const count = Math.min(room, block.length - from);
      lane.add(block, from, from + count);
      from += count;
      if (count === room) flush();
    }
  }

  frame(KIND.head, 0, 1, utf8(JSON.stringify(head)), 0);
  return {
    edges: (block) => add(lanes[0], block),
    tap: (number, block) => add(lanes[number + 1], block),
    async finish(tail) {
      flush();
      await queue;
      const before = offset;
      frame(KIND.tail, 0, 1, utf8(JSON.stringify({ tail, index })), 0);
      await queue;
      const end = new ByteWriter(8);
      end.word(offset - before);
      end.put(END);
      parts.push(end.bytes());
      return parts;
    },
  };
}

/** Edges of one lane that wait for their block to fill. */
class Lane {
  length = 0;
  ticks = new Float64Array(0);
  private lines = new Uint8Array(0);
  private columns: readonly Float32Array[];

  constructor(private readonly volts: boolean) {
    this.columns = volts ? [0, 1, 2, 3].map(() => new Float32Array(0)) : [];
  }

  add(block: EdgeBlock, from: number, to: number): void {
    const size = this.length + to - from;
    if (size > this.ticks.length) this.grow(Math.min(BLOCK_EDGES, Math.max(size, 2 * this.ticks.length, 4096)));
    this.ticks.set(block.ticks.subarray(from, to), this.length);
    this.lines.set(block.lines.subarray(from, to), this.length);
    const { volts } = block;
    if (this.volts && volts) {
      [volts.leadScl, volts.leadSda, volts.meanScl, volts.meanSda].forEach((column, k) => {
        this.columns[k].set(column.subarray(from, to), this.length);
      });
    }
    this.length = size;
  }

  block(): EdgeBlock {
    const [leadScl, leadSda, meanScl, meanSda] = this.columns;
    const volts: VoltColumns | null = this.volts ? { leadScl, leadSda, meanScl, meanSda } : null;
    return { length: this.length, ticks: this.ticks, lines: this.lines, volts };
  }

  private grow(size: number): void {
    const ticks = new Float64Array(size);
    ticks.set(this.ticks.subarray(0, this.length));
    const lines = new Uint8Array(size);
    lines.set(this.lines.subarray(0, this.length));
    this.columns = this.columns.map((column) => {
      const next = new Float32Array(size);
      next.set(column.subarray(0, this.length));
      return next;
    });
    this.ticks = ticks;
    this.lines = lines;
  }
}

async function* once(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  yield bytes;
}

async function joined(chunks: AsyncIterable<Uint8Array>): Promise<Uint8Array<ArrayBuffer>> {
  const out = new ByteWriter(65_536);
  for await (const chunk of chunks) out.put(chunk);
  return out.bytes();
}
