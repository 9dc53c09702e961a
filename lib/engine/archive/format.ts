// In: nothing. Out: the layout of an edge archive, version 1. A stored format: changed only by a new version beside it.
//
//   magic (8 bytes), then frames:  kind (1)  lane (1)  entries (4)  stored bytes (4)  payload, one gzip stream
//   head frame    kind 1   the capture's head as JSON
//   edge frames   kind 2   lane 0 the bus, lane n the n-th tap from 1; at most 2^20 edges, each block on its own
//   tail frame    kind 3   the capture's tail and the index of all edge frames as JSON
//   end (8 bytes)          length of the tail frame (4), "FLE1": a file without it was cut off
// Numbers are little-endian. The index lets a reader with ranges fetch any block; a reader of the stream has the first
// edges as soon as the first, smaller, block is there.

import { z } from "zod";
import type { CaptureHead, CaptureTail } from "../samples/reader";

/** "FLEDGE", version 1, and an end-of-text byte, so that the file is never taken for text. */
export const MAGIC = Uint8Array.of(0x46, 0x4c, 0x45, 0x44, 0x47, 0x45, 0x01, 0x04);
export const END = Uint8Array.of(0x46, 0x4c, 0x45, 0x31);
export const FRAME_BYTES = 10;
export const KIND = { head: 1, edges: 2, tail: 3 } as const;
/** Inflated payloads above this are refused: no block of ours comes near. */
export const PAYLOAD = 64 * 1024 * 1024;

const Warnings = z.array(
  z.object({ code: z.string(), message: z.string(), line: z.number().optional(), count: z.number().optional() }),
);
const Tap = z.object({
  label: z.string(),
  scl: z.string().nullable(),
  sda: z.string().nullable(),
  polarity: z.enum(["drive", "release"]),
});

export const HeadSchema = z.object({
  format: z.enum(["csv", "vcd"]),
  levels: z.enum(["digital", "volts"]),
  gzip: z.boolean(),
  timebase: z.object({ ticksPerSecond: z.number().positive(), origin: z.enum(["file", "given", "assumed"]) }),
  startTick: z.number(),
  sampleTicks: z.number().positive().nullable(),
  channels: z.array(
    z.object({
      id: z.string(),
      name: z.string(),
      unit: z.string().nullable(),
      kind: z.enum(["digital", "volts", "counts", "other"]),
    }),
  ),
  proposal: z.object({ scl: z.string(), sda: z.string(), basis: z.enum(["given", "names", "behaviour"]), reason: z.string() }),
  taps: z.array(Tap),
  vdd_v: z.number().nullable(),
  vil_v: z.number().nullable(),
  vih_v: z.number().nullable(),
  warnings: Warnings,
  metadata: z.array(z.tuple([z.string(), z.string()])),
});

/** JSON has no NaN: null stands for it. */
const Unknowable = z
  .number()
  .nullable()
  .transform((value) => value ?? Number.NaN);

export const TailSchema = z.object({
  tail: z.object({
    endTick: z.number(),
    samples: z.number(),
    sclEdges: z.number(),
    sdaEdges: z.number(),
    rowsSetAside: z.number(),
    excursions: z.array(z.object({ line: z.enum(["scl", "sda"]), tick: z.number(), width: Unknowable, extreme_v: Unknowable })),
    excursionCount: z.number(),
    warnings: Warnings,
  }),
  /** Per edge frame: lane, byte offset of the frame, stored bytes, edges, first tick. */
  index: z.array(z.tuple([z.number(), z.number(), z.number(), z.number(), z.number()])),
});

export type FrameIndex = z.infer<typeof TailSchema>["index"];

/** The schemas must accept exactly what the readers make. */
type Assert<T extends true> = T;
export type HeadIsHead = Assert<z.infer<typeof HeadSchema> extends CaptureHead ? true : false>;
export type TailIsTail = Assert<z.infer<typeof TailSchema>["tail"] extends CaptureTail ? true : false>;

/** Mean levels are rounded to about this share of VDD, a fifth of a millivolt. */
const MEAN_STEPS = 32_767;

/** Volts that mean levels are rounded to, a power of two; null where no volts are known: each block then has a step of its own. */
export function meanStepOf({ vdd_v }: Pick<CaptureHead, "vdd_v">): number | null {
  return vdd_v === null || !(vdd_v > 0) ? null : 2 ** Math.ceil(Math.log2(vdd_v / MEAN_STEPS));
}

/** Ticks that leads are rounded to: a 256th of a sample or less, far below what sampling can tell; 1 where nothing was sampled. */
export function leadStepOf(head: Pick<CaptureHead, "sampleTicks">): number {
  return head.sampleTicks === null || head.sampleTicks < 512 ? 1 : 2 ** Math.floor(Math.log2(head.sampleTicks / 256));
}
