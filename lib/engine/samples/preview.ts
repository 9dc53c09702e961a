// In: any file and the person's choices so far. Out: what the intake page shows before anything is decoded: how the file is
// understood, its first rows, the channels, the proposal with both orders decoded, or the problem beside all that was found.

import type { Problem, Warning } from "../../base/result";
import type { ByteSource, Host } from "../bytes/source";
import type { Encoding } from "../bytes/text";
import { proposeChannels } from "../channels/propose";
import type { LineTrace, PairPreview } from "../channels/trace";
import { type CsvView, examineCsv } from "./csv";
import type { Role } from "./csv/layout";
import { SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "./edges";
import { recognise } from "./open";
import type { CaptureHead, Channel, ChannelProposal, OpenCapture, ReadChoices } from "./reader";
import { openVcd } from "./vcd";

export interface PreviewRow {
  /** Line of the file, from 1. */
  readonly line: number;
  readonly cells: readonly string[];
  readonly readings: boolean;
}

/** How a CSV was understood. */
export interface CsvDialect {
  readonly delimiter: "comma" | "semicolon" | "tab" | "bar" | "spaces";
  readonly decimal: "." | ",";
  readonly encoding: Encoding;
  readonly header: boolean;
  readonly firstReadingsLine: number;
  readonly columns: readonly { readonly id: string; readonly name: string; readonly unit: string | null; readonly role: Role }[];
}

export interface CapturePreview {
  readonly format: "csv" | "vcd" | null;
  readonly gzip: boolean;
  readonly dialect: CsvDialect | null;
  /** CSV only: the last rows before the readings, then the first twenty rows of readings. */
  readonly rows: readonly PreviewRow[];
  readonly metadata: readonly (readonly [string, string])[];
  readonly channels: readonly Channel[];
  readonly head: CaptureHead | null;
  readonly proposal: ChannelProposal | null;
  /** What the proposed order and its swap decode to. */
  readonly preview: PairPreview | null;
  readonly swapped: PairPreview | null;
  readonly warnings: readonly Warning[];
  /** Why the file cannot be decoded yet, or at all. */
  readonly problem: Problem | null;
}

const ROWS_BEFORE = 6;
const ROWS_SHOWN = 20;
/** Edges by which the two orders are compared where the reader kept no preview. */
const PREVIEW_EDGES = 4096;

const NOTHING: CapturePreview = {
  format: null,
  gzip: false,
  dialect: null,
  rows: [],
  metadata: [],
  channels: [],
  head: null,
  proposal: null,
  preview: null,
  swapped: null,
  warnings: [],
  problem: null,
};

export async function previewCapture(source: ByteSource, host: Host, choices: ReadChoices): Promise<CapturePreview> {
  const found = await recognise(source, host);
  if (!found.ok) return { ...NOTHING, problem: found.problem };
  const { format, gzip, source: plain } = found.value;
  if (format === "vcd") {
    const opened = await openVcd(plain, choices, gzip);
    if (!opened.ok) return { ...NOTHING, format, gzip, problem: opened.problem };
    return { ...NOTHING, format, gzip, ...ofHead(opened.value.head), ...(await bothOrders(opened.value)) };
  }
  const { view, opened } = await examineCsv(plain, choices, gzip);
  const seen = view === null ? { ...NOTHING, format, gzip } : { ...NOTHING, format, gzip, ...ofView(view) };
  if (!opened.ok) return { ...seen, problem: opened.problem };
  return { ...seen, ...ofHead(opened.value.head), ...(await bothOrders(opened.value)) };
}

function ofHead(head: CaptureHead): Pick<CapturePreview, "head" | "metadata" | "channels" | "proposal" | "warnings"> {
  return { head, metadata: head.metadata, channels: head.channels, proposal: head.proposal, warnings: head.warnings };
}

const DELIMITER_WORDS = { ",": "comma", ";": "semicolon", "\t": "tab", "|": "bar", " ": "spaces" } as const;

function ofView(view: CsvView): Pick<CapturePreview, "dialect" | "rows" | "metadata" | "channels" | "warnings"> {
  const { layout } = view;
  const at = view.rows.findIndex((row) => row.line >= layout.firstLine);
  const shown = view.rows.slice(Math.max(0, at - ROWS_BEFORE), at + ROWS_SHOWN);
  return {
    dialect: {
      delimiter: DELIMITER_WORDS[layout.dialect.delimiter],
      decimal: layout.dialect.decimal,
      encoding: view.encoding,
      header: layout.named,
      firstReadingsLine: layout.firstLine,
      columns: layout.columns.map((column) => ({
        id: `@${column.index + 1}`,
        name: column.name,
        unit: column.unit?.symbol ?? null,
        role: column.role,
      })),
    },
    rows: shown.map((row) => ({ line: row.line, cells: row.cells, readings: row.line >= layout.firstLine })),
    metadata: layout.metadata,
    channels: view.sources.map((source) => source.channel),
    warnings: view.warnings,
  };
}

/** Thrown into the reader to end a preview's reading; never leaves this file. */
class Enough extends Error {}

/** Decodes the first edges in the proposed order and swapped. */
async function bothOrders(capture: OpenCapture): Promise<Pick<CapturePreview, "preview" | "swapped">> {
  const { proposal, channels } = capture.head;
  const traces = [new Trace(proposal.scl, SCL, SCL_UNKNOWN), new Trace(proposal.sda, SDA, SDA_UNKNOWN)];
  let edges = 0;
  try {
    await capture.read({
      edges(block) {
        for (let i = 0; i < block.length; i += 1) for (const trace of traces) trace.take(block.ticks[i], block.lines[i]);
        edges += block.length;
        if (edges >= PREVIEW_EDGES) throw new Enough();
      },
      tap: () => undefined,
      progress: () => undefined,
    });
  } catch (error) {
    if (!(error instanceof Enough)) throw error;
  }
  const both = channels.filter((channel) => channel.id === proposal.scl || channel.id === proposal.sda);
  const given = proposeChannels(
    traces.map((trace) => trace.trace()),
    both,
    { scl: proposal.scl, sda: proposal.sda },
  );
  return given.ok ? { preview: given.value.preview, swapped: given.value.swapped } : { preview: null, swapped: null };
}

class Trace {
  private readonly ticks: number[] = [];
  private readonly levels: number[] = [];
  private level: 0 | 1 | 2 | -1 = -1;
  private initial: 0 | 1 | 2 = 2;

  constructor(
    private readonly id: string,
    private readonly high: number,
    private readonly unknown: number,
  ) {}

  take(tick: number, lines: number): void {
    const level = (lines & this.unknown) !== 0 ? 2 : (lines & this.high) !== 0 ? 1 : 0;
    if (level === this.level) return;
    if (this.level === -1) this.initial = level;
    else {
      this.ticks.push(tick);
      this.levels.push(level);
    }
    this.level = level;
  }

  trace(): LineTrace {
    return {
      id: this.id,
      name: "",
      initial: this.initial,
      length: this.ticks.length,
      ticks: Float64Array.from(this.ticks),
      levels: Uint8Array.from(this.levels),
    };
  }
}
