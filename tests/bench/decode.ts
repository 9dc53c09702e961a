// Goal 5: decoding with every timing statistic, against a bare loop over the same arrays in the same run.

import { RuleBook } from "../../lib/diagnosis/rulebook";
import { createDecoder } from "../../lib/engine/decode";
import { type EdgeBlock, SCL, SDA } from "../../lib/engine/samples/edges";
import type { CaptureHead } from "../../lib/engine/samples/reader";
import { createMeasurement } from "../../lib/limits/measure";
import { builtIn, TRIED_MODES } from "../../lib/limits/profile";
import { interleaved, type Row, type Suite } from "./measure";

const EDGES = 10_000_000;
const BLOCK = 1 << 20;
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

/** Writes of four bytes at 400 kHz with jitter of some ns, until there are enough edges. Seeded, so every run sees the same. */
function traffic(): EdgeBlock[] {
  const ticks = new Float64Array(EDGES);
  const lines = new Uint8Array(EDGES);
  let n = 0;
  let at = 1000;
  let seed = 12345;
  let scl = SCL;
  let sda = SDA;
  const random = () => {
    seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0;
    return seed >>> 8;
  };
  const put = (wait: number, nextScl: number, nextSda: number) => {
    at += wait + (random() % 16);
    if ((nextScl === scl && nextSda === sda) || n === EDGES) return;
    scl = nextScl;
    sda = nextSda;
    ticks[n] = at;
    lines[n++] = scl | sda;
  };
  const bit = (value: number) => {
    put(300, 0, value === 1 ? SDA : 0);
    put(1050, SCL, sda);
    put(1200, 0, sda);
  };
  put(0, SCL, 0);
  while (n < EDGES) {
    put(5000, SCL, SDA);
    put(700, SCL, 0);
    put(700, 0, 0);
    for (let byte = 0; byte < 5; byte++) {
      const value = random();
      for (let b = 7; b >= 0; b--) bit((value >> b) & 1);
      bit(0);
    }
    put(300, 0, 0);
    put(1050, SCL, 0);
    put(700, SCL, SDA);
  }
  const blocks: EdgeBlock[] = [];
  for (let from = 0; from < EDGES; from += BLOCK) {
    const to = Math.min(EDGES, from + BLOCK);
    blocks.push({ length: to - from, ticks: ticks.subarray(from, to), lines: lines.subarray(from, to), volts: null });
  }
  return blocks;
}

function bareLoop(blocks: readonly EdgeBlock[]): number {
  let sum = 0;
  let levels = 0;
  let before = 0;
  for (const { ticks, lines, length } of blocks) {
    for (let i = 0; i < length; i++) {
      sum += ticks[i] - before;
      before = ticks[i];
      levels ^= lines[i];
    }
  }
  return sum + levels;
}

/**
 * What the last runs were made of. The collection between rounds would else throw away the compiled code with the last object
 * that it was compiled for, and every round would time the compiler anew.
 */
const kept: unknown[] = [];

function decodeAndMeasure(blocks: readonly EdgeBlock[], book: RuleBook | null): number {
  const measurement = createMeasurement(
    HEAD,
    TRIED_MODES.map((name) => builtIn(name)),
    builtIn("Standard-mode").hs,
  );
  let transactions = 0;
  const decoder = createDecoder(HEAD, {
    bits(block) {
      measurement.bits(block);
      book?.bits(block);
    },
    transactions(block, bytes) {
      transactions += block.length;
      book?.transactions(block, bytes);
    },
    spike: (spike) => measurement.spike(spike),
    remnant() {},
  });
  for (const block of blocks) decoder.push(block);
  const last = blocks[blocks.length - 1];
  decoder.finish(last.ticks[last.length - 1]);
  if (measurement.measured.fs.low.count === 0 || transactions === 0) throw new Error("nothing was decoded");
  kept.splice(0, Math.max(0, kept.length - 4), [decoder, measurement, book]);
  return transactions;
}

const ROUNDS = 5;
/** 20 M edges a second. */
const FLOOR_MS = EDGES / 20_000;

export const suite: Suite = {
  name: "decode",
  async run(): Promise<Row[]> {
    const blocks = traffic();
    const times = await interleaved(
      [
        { name: "bare", run: () => void bareLoop(blocks) },
        { name: "measured", run: () => void decodeAndMeasure(blocks, null) },
        { name: "ruled", run: () => void decodeAndMeasure(blocks, new RuleBook(HEAD)) },
      ],
      ROUNDS,
    );
    const ms = (name: string) => times.get(name) ?? Number.NaN;
    const bare = { baseline: "a bare loop over the same edges", baselineMs: ms("bare") };
    const floor = { baseline: "20 M edges a second", baselineMs: FLOOR_MS };
    return [
      { goal: "5", what: "decode 10 M edges with all timing", ms: ms("measured"), ...bare, sense: "at most", limit: 12 },
      { goal: "5", what: "the same, in absolute terms", ms: ms("measured"), ...floor, sense: "at most", limit: 1 },
      { goal: "5", what: "the same with every fault rule watching", ms: ms("ruled"), ...floor, sense: "at most", limit: 1 },
    ];
  },
};
