// In: the text of a VCD, or any capture's bytes. Out: what the readers and the decoder make of it, in short text.

import type { ByteSource } from "@/lib/engine/bytes/source";
import { createDecoder } from "@/lib/engine/decode";
import type { EdgeBlock } from "@/lib/engine/samples/edges";
import type { CaptureHead, CaptureTail, OpenCapture, ReadChoices } from "@/lib/engine/samples/reader";
import { openVcd } from "@/lib/engine/samples/vcd";
import type { Change } from "./vcd-bus";

/** A source that delivers `bytes` in chunks of the given lengths, over and over, through one reused buffer as real ones do. */
export function sourceOf(bytes: Uint8Array | string, lengths: readonly number[] = [65_536], name = "test.vcd"): ByteSource {
  const whole = typeof bytes === "string" ? new TextEncoder().encode(bytes) : bytes;
  async function* open(): AsyncGenerator<Uint8Array> {
    const buffer = new Uint8Array(Math.max(...lengths));
    for (let at = 0, turn = 0; at < whole.length; turn++) {
      const length = Math.min(lengths[turn % lengths.length], whole.length - at);
      buffer.set(whole.subarray(at, at + length));
      yield buffer.subarray(0, length);
      at += length;
    }
  }
  return { name, size: whole.length, open };
}

export interface Entry {
  readonly tick: number;
  readonly lines: number;
}

export interface ReadOut {
  readonly head: CaptureHead;
  readonly tail: CaptureTail;
  readonly edges: readonly Entry[];
  readonly blocks: readonly EdgeBlock[];
  readonly taps: readonly (readonly Entry[])[];
  /** "S A0 A 01 A P ..." */
  readonly said: string;
  readonly codes: readonly string[];
}

function entries(block: EdgeBlock): Entry[] {
  return Array.from({ length: block.length }, (_, i) => ({ tick: block.ticks[i], lines: block.lines[i] }));
}

/** Reads an opened capture to its end. */
export async function readOut({ head, read }: OpenCapture): Promise<ReadOut> {
  const blocks: EdgeBlock[] = [];
  const taps: Entry[][] = head.taps.map(() => []);
  const said: string[] = [];
  const decoder = createDecoder(head, {
    bits: () => undefined,
    spike: () => undefined,
    remnant: () => undefined,
    transactions: (block, bytes) => {
      let at = 0;
      for (let i = 0; i < block.length; i++) {
        said.push(block.opens[i] === 0 ? "S" : "Sr");
        for (let k = 0; k < block.byteCount[i]; k++, at++) {
          const value = bytes.value[at].toString(16).toUpperCase().padStart(2, "0");
          said.push(bytes.bits[at] < 8 ? `(${bytes.bits[at]} bits)` : `${value} ${["N", "A", "-"][bytes.ack[at]]}`);
        }
        if (block.closes[i] !== 1) said.push(block.closes[i] === 0 ? "P" : "...");
      }
    },
  });
  const tail = await read({
    edges: (block) => {
      blocks.push(block);
      decoder.push(block);
    },
    tap: (index, block) => taps[index].push(...entries(block)),
    progress: () => undefined,
  });
  if (!tail.ok) throw new Error(tail.problem.message);
  decoder.finish(tail.value.endTick);
  const codes = [...head.warnings, ...tail.value.warnings].map((warning) => warning.code);
  return { head, tail: tail.value, edges: blocks.flatMap(entries), blocks, taps, said: said.join(" "), codes };
}

export async function readVcd(
  text: string | Uint8Array,
  choices: ReadChoices = {},
  lengths?: readonly number[],
): Promise<ReadOut> {
  const opened = await openVcd(sourceOf(text, lengths), choices, false);
  if (!opened.ok) throw new Error(opened.problem.message);
  return readOut(opened.value);
}

/** Opens and reads what must be refused; the problem, from whichever of the two refuses. */
export async function refusedVcd(text: string | Uint8Array, choices: ReadChoices = {}) {
  const opened = await openVcd(sourceOf(text), choices, false);
  if (!opened.ok) return opened.problem;
  const tail = await opened.value.read({ edges: () => undefined, tap: () => undefined, progress: () => undefined });
  if (!tail.ok) return tail.problem;
  throw new Error(`accepted: ${opened.value.head.proposal.reason}`);
}

export interface Spelling {
  /** Words for a scalar change. */
  readonly change?: (line: "scl" | "sda", level: 0 | 1) => string;
  readonly header?: string;
  readonly initial?: string;
}

export const HEADER = `$timescale 1 ns $end
$scope module top $end
$var wire 1 ! scl $end
$var wire 1 " sda $end
$upscope $end
$enddefinitions $end
`;

/** The changes as a VCD; what is not spelt out is written the plain way. */
export function vcdOf(changes: readonly Change[], end: number, spelling: Spelling = {}): string {
  const change = spelling.change ?? ((line, level) => `${level}${line === "scl" ? "!" : '"'}`);
  const lines = [
    spelling.header ?? HEADER,
    "#0",
    spelling.initial ?? `$dumpvars\n${change("scl", 1)}\n${change("sda", 1)}\n$end`,
  ];
  let tick = 0;
  for (const { tick: at, line, level } of changes) {
    if (at !== tick) lines.push(`#${at}`);
    tick = at;
    lines.push(change(line, level));
  }
  lines.push(`#${end}`, "");
  return lines.join("\n");
}
