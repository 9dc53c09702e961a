// Bus traffic as tables: transactions become levels over time, levels become CSV text in any dialect.

import type { ByteSource } from "../../lib/engine/bytes/source";
import type { EdgeBlock } from "../../lib/engine/samples/edges";
import { openCapture } from "../../lib/engine/samples/open";
import type { CaptureTail, OpenCapture, Opened, ReadChoices } from "../../lib/engine/samples/reader";
import { host } from "../../workers/host";

/** Levels of both lines from one instant to the next. */
export interface Step {
  /** Nanoseconds. */
  readonly at: number;
  readonly scl: 0 | 1;
  readonly sda: 0 | 1;
}

/** S, the bytes with their acknowledge bits (0 = ACK), P; 2.5 us quarter bits, so 100 kHz. */
export function frame(start: number, bytes: readonly number[]): Step[] {
  const steps: Step[] = [];
  let at = start;
  const put = (scl: 0 | 1, sda: 0 | 1) => {
    steps.push({ at, scl, sda });
    at += 2500;
  };
  put(1, 0);
  put(0, 0);
  for (const byte of bytes) {
    for (let bit = 7; bit >= -1; bit -= 1) {
      const level = (bit < 0 ? 0 : (byte >> bit) & 1) as 0 | 1;
      put(0, level);
      put(1, level);
      at += 2500;
      put(0, level);
    }
  }
  put(0, 0);
  put(1, 0);
  put(1, 1);
  return steps;
}

/** Idle, then several frames with idle between them; changes of level only. */
export function traffic(frames: readonly (readonly number[])[]): Step[] {
  const steps: Step[] = [{ at: 0, scl: 1, sda: 1 }];
  let at = 20_000;
  for (const bytes of frames) {
    const made = frame(at, bytes);
    steps.push(...made);
    at = made[made.length - 1].at + 30_000;
  }
  steps.push({ at, scl: 1, sda: 1 });
  return steps.filter(
    (step, i) => i === 0 || i === steps.length - 1 || step.scl !== steps[i - 1].scl || step.sda !== steps[i - 1].sda,
  );
}

/** Uniform samples every `interval` nanoseconds. */
export function sampled(steps: readonly Step[], interval: number): Step[] {
  const rows: Step[] = [];
  let next = 0;
  const end = steps[steps.length - 1].at;
  for (let at = 0; at <= end; at += interval) {
    while (next + 1 < steps.length && steps[next + 1].at <= at) next += 1;
    rows.push({ at, scl: steps[next].scl, sda: steps[next].sda });
  }
  return rows;
}

export const DEMO = [
  [0xa0, 0x01, 0x55],
  [0xa1, 0x3c],
  [0x90, 0xff, 0x00, 0x7e],
];

export interface ReadBack {
  readonly capture: OpenCapture;
  readonly tail: CaptureTail;
  readonly ticks: number[];
  readonly lines: number[];
  readonly blocks: EdgeBlock[];
  readonly taps: { readonly index: number; readonly block: EdgeBlock }[];
}

export function source(content: string | Uint8Array, name = "capture.csv", cuts: readonly number[] = []): ByteSource {
  const bytes = typeof content === "string" ? new TextEncoder().encode(content) : content;
  return {
    name,
    size: bytes.length,
    async *open() {
      let from = 0;
      for (const cut of [...cuts, bytes.length]) {
        const to = Math.min(bytes.length, Math.max(from, cut));
        if (to > from) yield bytes.slice(from, to);
        from = to;
      }
    },
  };
}

export async function openText(
  content: string | Uint8Array,
  choices: ReadChoices = {},
  cuts: readonly number[] = [],
): Promise<Opened> {
  return openCapture(source(content, "capture.csv", cuts), host, choices);
}

export async function readText(
  content: string | Uint8Array,
  choices: ReadChoices = {},
  cuts: readonly number[] = [],
): Promise<ReadBack> {
  const opened = await openText(content, choices, cuts);
  if (!opened.ok) throw new Error(`${opened.problem.code}: ${opened.problem.message}`);
  return readCapture(opened.value);
}

export async function readCapture(capture: OpenCapture): Promise<ReadBack> {
  const ticks: number[] = [];
  const lines: number[] = [];
  const blocks: EdgeBlock[] = [];
  const taps: { index: number; block: EdgeBlock }[] = [];
  const result = await capture.read({
    edges(block) {
      blocks.push(block);
      for (let i = 0; i < block.length; i += 1) {
        ticks.push(block.ticks[i]);
        lines.push(block.lines[i]);
      }
    },
    tap: (index, block) => void taps.push({ index, block }),
    progress: () => undefined,
  });
  if (!result.ok) throw new Error(`${result.problem.code}: ${result.problem.message}`);
  return { capture, tail: result.value, ticks, lines, blocks, taps };
}
