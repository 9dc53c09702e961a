// In: a ByteSource and the person's choices. Out: the contract that the CSV and the VCD reader both keep.

import type { Problem, Result, Warning } from "../../base/result";
import type { Timebase } from "../../base/time";
import type { EdgeBlock, Excursion } from "./edges";

/** A channel as the file offers it. `id` is unique in the file and is what a person's choice names. */
export interface Channel {
  /** CSV: "@N" (column from 1). VCD: full path, with [bit] for one bit of a vector. */
  readonly id: string;
  /** Header cell or last part of the path; may be empty, duplicated or a number. */
  readonly name: string;
  readonly unit: string | null;
  /** digital: 0/1 words; volts: real numbers with a scale; counts: converter counts with no scale; other: unusable here. */
  readonly kind: "digital" | "volts" | "counts" | "other";
}

/** What device one tap shows driving. A line that is not tapped is null. */
export interface TapChoice {
  readonly label: string;
  readonly scl: string | null;
  readonly sda: string | null;
  /** What a 1 means: release (wired-AND view, default) or drive (pulls low). */
  readonly polarity: "drive" | "release";
}

/** The person's answers; everything absent is found from the file, and what was assumed becomes a warning. */
export interface ReadChoices {
  readonly scl?: string;
  readonly sda?: string;
  readonly taps?: readonly TapChoice[];
  /** Seconds between samples, where the file does not say. */
  readonly interval_s?: number;
  readonly vdd_v?: number;
  readonly vil_v?: number;
  readonly vih_v?: number;
  /** VCD: whether a z on a bus line is high because a pull-up exists. Default true, stated as a warning where it matters. */
  readonly pullup?: boolean;
}

/** How the two lines were found. */
export interface ChannelProposal {
  readonly scl: string;
  readonly sda: string;
  readonly basis: "given" | "names" | "behaviour";
  /** One sentence for the person. */
  readonly reason: string;
}

/** Known before the first edge leaves. */
export interface CaptureHead {
  readonly format: "csv" | "vcd";
  readonly levels: "digital" | "volts";
  readonly gzip: boolean;
  readonly timebase: Timebase;
  readonly startTick: number;
  /** Ticks between samples, or null where the file has change times only. */
  readonly sampleTicks: number | null;
  readonly channels: readonly Channel[];
  readonly proposal: ChannelProposal;
  readonly taps: readonly TapChoice[];
  /** Volts only. For raw counts (no scale) these are null and no volts are shown: levels come from the two clusters. */
  readonly vdd_v: number | null;
  readonly vil_v: number | null;
  readonly vih_v: number | null;
  readonly warnings: readonly Warning[];
  /** CSV preamble or VCD header as key/value pairs, for the preview. */
  readonly metadata: readonly (readonly [string, string])[];
}

/** Known only at the end. */
export interface CaptureTail {
  readonly endTick: number;
  /** Rows of a CSV, or value changes read of a VCD. */
  readonly samples: number;
  readonly sclEdges: number;
  readonly sdaEdges: number;
  readonly rowsSetAside: number;
  readonly excursions: readonly Excursion[];
  readonly excursionCount: number;
  readonly warnings: readonly Warning[];
}

/** Where the edges go while the file is read. `tap` blocks carry the tap's own scl/sda in the same bits (1 = released). */
export interface EdgeSink {
  /** The sink looks back at no more than the block before: an older block's memory may be used again. Absent: it may keep all. */
  readonly passing?: boolean;
  edges(block: EdgeBlock): void;
  tap(index: number, block: EdgeBlock): void;
  /** Bytes of the stored file consumed so far. Called at least once per chunk; may be used to stop by throwing `signal`. */
  progress(bytes: number): void;
}

/** One opened capture: the head is settled, the body can be read once per call of `read`. */
export interface OpenCapture {
  readonly head: CaptureHead;
  read(sink: EdgeSink): Promise<Result<CaptureTail>>;
}

/** Result of opening: a capture, or the question that must be answered first, or a refusal. */
export type Opened = Result<OpenCapture, Problem>;
