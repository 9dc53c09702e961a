// Decoding with every timing statistic and forensics beside it, against the same without forensics: it may at most double.

import { createDecoder } from "../../lib/engine/decode";
import type { EdgeBlock } from "../../lib/engine/samples/edges";
import type { CaptureHead } from "../../lib/engine/samples/reader";
import { createForensics } from "../../lib/forensics/forensics";
import { createMeasurement } from "../../lib/limits/measure";
import { builtIn, TRIED_MODES } from "../../lib/limits/profile";
import { simulate } from "../../lib/simulation/bus";
import { controller, scenario, target } from "../../lib/simulation/plan";
import { createRandom } from "../../lib/simulation/random";
import { captureLevels } from "../../lib/simulation/sampling";
import { write } from "../../lib/simulation/script";
import { interleaved, type Row, type Suite } from "./measure";

const EDGES = 10_000_000;
const HEAD: CaptureHead = {
  format: "csv",
  levels: "digital",
  gzip: false,
  timebase: { ticksPerSecond: 1e12, origin: "file" },
  startTick: 0,
  sampleTicks: 50_000,
  channels: [],
  proposal: { scl: "SCL", sda: "SDA", basis: "given", reason: "" },
  taps: [],
  vdd_v: null,
  vil_v: null,
  vih_v: null,
  warnings: [],
  metadata: [],
};

/** Two controllers with jitter, one message in two hundred contested, sampled at 20 MS/s; one stretch of it end to end until there are enough edges. */
function traffic(): EdgeBlock[] {
  const random = createRandom(3);
  const jobs = [0, 1].map((c) =>
    Array.from({ length: 400 }, (_, i) => {
      const together = i % 200 === 100 ? 0 : c * 0.9e-3;
      const bytes = Array.from({ length: 4 }, () => random.int(0, 255));
      return { at_s: 1e-3 + i * 2e-3 + together, message: [write(0x20 + c, bytes)], resetAfter: null };
    }),
  );
  const recording = simulate(
    scenario(3, 0.803, {
      controllers: [
        controller("pump", { jitter_s: 8e-9 }, { jobs: jobs[0] }),
        controller("gateway", { tlow_s: 5.6e-6, thigh_s: 4.2e-6, dataFall_s: 0.9e-6, jitter_s: 12e-9 }, { jobs: jobs[1] }),
      ],
      targets: [target("valves", 0x20), target("level", 0x21)],
    }),
  );
  const part = captureLevels(recording, { rate_hz: 20e6, phase_s: 0, threshold: 0.5 });
  const blocks: EdgeBlock[] = [];
  for (let n = 0; n < EDGES; n += part.length) {
    const offset = blocks.length * recording.endPs;
    blocks.push({ ...part, ticks: part.ticks.map((tick) => tick + offset) });
  }
  return blocks;
}

/**
 * What the last runs were made of. The collection between rounds would else throw away the compiled code with the last object
 * that it was compiled for, and every round would time the compiler anew.
 */
const kept: unknown[] = [];

function run(blocks: readonly EdgeBlock[], withForensics: boolean): void {
  const measurement = createMeasurement(
    HEAD,
    TRIED_MODES.map((name) => builtIn(name)),
    builtIn("Standard-mode").hs,
  );
  const forensics = withForensics ? createForensics(HEAD, [], { roster: [], log: [] }) : null;
  const decoder = createDecoder(HEAD, {
    bits(block) {
      measurement.bits(block);
      forensics?.bits(block);
    },
    transactions: (block, bytes) => forensics?.transactions(block, bytes),
    spike: (spike) => measurement.spike(spike),
    remnant() {},
  });
  for (const block of blocks) decoder.push(block);
  const last = blocks[blocks.length - 1];
  const end = last.ticks[last.length - 1];
  decoder.finish(end);
  const concluded = forensics?.conclude(end);
  if (concluded !== undefined && concluded.controllers.length !== 2) throw new Error("two controllers were expected");
  kept.splice(0, Math.max(0, kept.length - 2), [decoder, measurement, forensics, concluded]);
}

export const suite: Suite = {
  name: "forensics",
  async run(): Promise<Row[]> {
    const blocks = traffic();
    const times = await interleaved(
      [
        { name: "plain", run: () => run(blocks, false) },
        { name: "forensics", run: () => run(blocks, true) },
      ],
      3,
    );
    const plain = times.get("plain") ?? Number.NaN;
    const both = times.get("forensics") ?? Number.NaN;
    return [
      {
        goal: "5f",
        what: "decode 10 M edges with all timing and forensics",
        ms: both,
        baseline: "the same without forensics",
        baselineMs: plain,
        sense: "at most",
        limit: 2,
      },
    ];
  },
};
