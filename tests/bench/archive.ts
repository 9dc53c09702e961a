// Goal 10: size of the edge archive, against bytes an edge and against a gzip-compressed VCD of the same two lines; and the
// engine's part of goal 11: the first edges of a share are there long before the last.

import { gzipSync } from "node:zlib";
import { openArchive } from "../../lib/engine/archive/reader";
import { createArchiveWriter } from "../../lib/engine/archive/writer";
import type { ByteSource } from "../../lib/engine/bytes/source";
import { type EdgeBlock, SCL, SDA } from "../../lib/engine/samples/edges";
import type { CaptureHead } from "../../lib/engine/samples/reader";
import { host } from "../../workers/host";
import { interleaved, type Row, type Suite } from "./measure";

const EDGES = Number(process.env.FIRSTLOW_BENCH_EDGES ?? 4_000_000);
const BLOCK = 1 << 16;
const ROUNDS = Number(process.env.FIRSTLOW_BENCH_ROUNDS ?? 5);

const HEAD: CaptureHead = {
  format: "vcd",
  levels: "digital",
  gzip: false,
  timebase: { ticksPerSecond: 1e9, origin: "file" },
  startTick: 0,
  sampleTicks: null,
  channels: [],
  proposal: { scl: "SCL", sda: "SDA", basis: "given", reason: "" },
  taps: [],
  vdd_v: null,
  vil_v: null,
  vih_v: null,
  warnings: [],
  metadata: [],
};

/** Register writes and reads of a few devices at 400 kHz. `grid`: ns between samples; 1 keeps a jitter of some ns. */
function traffic(grid: number): EdgeBlock[] {
  const ticks = new Float64Array(EDGES);
  const lines = new Uint8Array(EDGES);
  let n = 0;
  let at = 1000;
  let seed = 4711;
  let levels = SCL | SDA;
  const random = (below: number) => {
    seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0;
    return Math.floor((seed / 2 ** 32) * below);
  };
  const put = (wait: number, next: number) => {
    at += wait + random(12);
    if (next === levels || n === EDGES) return;
    levels = next;
    const tick = Math.round(at / grid) * grid;
    // Two changes within one sample are one.
    if (n > 0 && ticks[n - 1] >= tick) lines[n - 1] = next;
    else {
      ticks[n] = tick;
      lines[n++] = next;
    }
  };
  put(0, SCL | SDA);
  while (n < EDGES) {
    put(20_000 + random(60_000), SCL);
    put(700, 0);
    const bytes = [0x90 + 2 * random(4), random(8), ...Array.from({ length: 1 + random(4) }, () => 0x40 + random(32))];
    for (const value of bytes) {
      for (let bit = 7; bit >= -1; bit--) {
        const sda = bit >= 0 && ((value >> bit) & 1) === 1 ? SDA : 0;
        put(300, sda);
        put(1000, SCL | sda);
        put(1200, sda);
      }
    }
    put(300, 0);
    put(1000, SCL);
    put(700, SCL | SDA);
  }
  const blocks: EdgeBlock[] = [];
  for (let from = 0; from < n; from += BLOCK) {
    const to = Math.min(n, from + BLOCK);
    blocks.push({ length: to - from, ticks: ticks.subarray(from, to), lines: lines.subarray(from, to), volts: null });
  }
  return blocks;
}

async function pack(blocks: readonly EdgeBlock[]): Promise<Uint8Array> {
  const writer = createArchiveWriter(HEAD, host.deflate);
  for (const block of blocks) writer.edges(block);
  const tail = {
    endTick: 1e12,
    samples: EDGES,
    sclEdges: 0,
    sdaEdges: 0,
    rowsSetAside: 0,
    excursions: [],
    excursionCount: 0,
    warnings: [],
  };
  return new Uint8Array(await new Blob(await writer.finish(tail)).arrayBuffer());
}

function vcdGzip(blocks: readonly EdgeBlock[]): number {
  const parts = ['$timescale 1 ns $end $var wire 1 ! scl $end $var wire 1 " sda $end $enddefinitions $end\n'];
  let last = -1;
  for (const { ticks, lines, length } of blocks) {
    for (let i = 0; i < length; i++) {
      const changed = last < 0 ? 3 : last ^ lines[i];
      parts.push(`#${ticks[i]}\n`);
      if (changed & SCL) parts.push(lines[i] & SCL ? "1!\n" : "0!\n");
      if (changed & SDA) parts.push(lines[i] & SDA ? '1"\n' : '0"\n');
      last = lines[i];
    }
  }
  return gzipSync(parts.join(""), { level: 6 }).length;
}

function sourceOf(bytes: Uint8Array): ByteSource {
  async function* open(): AsyncGenerator<Uint8Array> {
    for (let at = 0; at < bytes.length; at += 65_536) yield bytes.subarray(at, at + 65_536);
  }
  return { name: "bench", size: bytes.length, open };
}

class Enough extends Error {}

/** Opens the archive; `whole`: to the last edge, else to the first block. */
async function unpack(bytes: Uint8Array, whole: boolean): Promise<void> {
  const opened = await openArchive(sourceOf(bytes), host);
  if (!opened.ok) throw new Error(opened.problem.message);
  let edges = 0;
  const onEdges = (block: EdgeBlock) => {
    edges += block.length;
    if (!whole) throw new Enough();
  };
  try {
    await opened.value.read({ edges: onEdges, tap: () => undefined, progress: () => undefined });
  } catch (error) {
    if (!(error instanceof Enough)) throw error;
  }
  if (edges === 0) throw new Error("no edges");
}

async function rowsOf(what: string, grid: number, bytesAnEdge: number): Promise<Row[]> {
  const blocks = traffic(grid);
  const edges = blocks.reduce((sum, block) => sum + block.length, 0);
  const bytes = await pack(blocks);
  const times = await interleaved(
    [
      { name: "pack", run: async () => void (await pack(blocks)) },
      { name: "first", run: () => unpack(bytes, false) },
      { name: "all", run: () => unpack(bytes, true) },
    ],
    ROUNDS,
  );
  const ms = (name: string) => times.get(name) ?? Number.NaN;
  const size = (part: string, baseline: string, baselineMs: number, sense: Row["sense"], limit: number): Row => ({
    goal: "10",
    what: `archive, ${what}: ${part}`,
    ms: bytes.length,
    baseline,
    baselineMs,
    unit: "bytes",
    sense,
    limit,
  });
  const unpacked = { baseline: "opening it to the last edge", baselineMs: ms("all") };
  return [
    size("bytes an edge", "one byte an edge", edges, "at most", bytesAnEdge),
    size("smaller than VCD.gz", "the same lines as VCD.gz", vcdGzip(blocks), "at least", 3),
    { goal: "11", what: `share, ${what}: first edges there`, ms: ms("first"), ...unpacked, sense: "at most", limit: 0.25 },
    {
      goal: "11",
      what: `share, ${what}: decoding outruns compressing`,
      ms: ms("all"),
      baseline: "making the archive",
      baselineMs: ms("pack"),
      sense: "at most",
      limit: 1,
    },
  ];
}

export const suite: Suite = {
  name: "archive",
  async run(): Promise<Row[]> {
    return [...(await rowsOf("jitter of some ns", 1, 1.3)), ...(await rowsOf("100 ns samples", 100, 0.4))];
  },
};
