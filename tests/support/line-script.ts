// A bus written down move by move: each call moves the lines and the clock. Out: a capture that the analysis can read. Times in ns.

import { ok } from "@/lib/base/result";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import { analyze } from "@/lib/diagnosis/analyze";
import type { Report, Summary } from "@/lib/diagnosis/report";
import { wholeReport } from "@/lib/diagnosis/serial";
import { TransactionStore } from "@/lib/diagnosis/transaction";
import { type EdgeBlock, type Excursion, SCL, SDA } from "@/lib/engine/samples/edges";
import type { CaptureHead, CaptureTail, OpenCapture } from "@/lib/engine/samples/reader";

interface Moved {
  tick: number;
  scl: 0 | 1;
  sda: 0 | 1;
}

export interface BitMove {
  stretch?: number;
  high?: number;
  low?: number;
}

export class LineScript {
  private at = 20_000;
  private scl: 0 | 1 = 1;
  private sda: 0 | 1 = 1;
  private readonly moves: Moved[] = [{ tick: 0, scl: 1, sda: 1 }];

  /** A 95 kHz bus: Standard-mode with room to every limit. */
  constructor(
    readonly low = 5500,
    readonly high = 5000,
    readonly hold = 600,
  ) {}

  wait(ns: number): this {
    this.at += ns;
    return this;
  }

  move(scl: 0 | 1, sda: 0 | 1): this {
    if (scl === this.scl && sda === this.sda) return this;
    this.scl = scl;
    this.sda = sda;
    this.moves.push({ tick: this.at, scl, sda });
    return this;
  }

  start(): this {
    return this.move(1, 0).wait(4500).move(0, 0);
  }

  bit(value: 0 | 1, { stretch = 0, high = this.high, low = this.low }: BitMove = {}): this {
    this.wait(this.hold).move(0, value);
    return this.wait(low - this.hold + stretch)
      .move(1, value)
      .wait(high)
      .move(0, value);
  }

  /** Eight bits and the acknowledge; `last` moves the ninth. */
  byte(value: number, ack = true, last: BitMove = {}): this {
    for (let i = 7; i >= 0; i--) this.bit(((value >> i) & 1) as 0 | 1);
    return this.bit(ack ? 0 : 1, last);
  }

  /** SCL rises with SDA as given, and stays. */
  rise(sda: 0 | 1): this {
    return this.wait(this.hold)
      .move(0, sda)
      .wait(this.low - this.hold)
      .move(1, sda);
  }

  stop(): this {
    return this.rise(0).wait(4500).move(1, 1).wait(30_000);
  }

  repeated(): this {
    return this.rise(1).wait(5000).start();
  }

  /** A write that nothing is wrong with. */
  write(...bytes: number[]): this {
    this.start();
    for (const byte of bytes) this.byte(byte);
    return this.stop();
  }

  get now(): number {
    return this.at;
  }

  /** As a VCD whose step is 1 ns. */
  vcd(silent = 100_000): string {
    const head = '$timescale 1 ns $end $scope module top $end $var wire 1 ! SCL $end $var wire 1 " SDA $end $upscope $end';
    const changes = this.moves.map(({ tick, scl, sda }) => `#${tick}\n${scl}!\n${sda}"`);
    return `${head} $enddefinitions $end\n${changes.join("\n")}\n#${this.at + silent}\n`;
  }

  /** As a CSV of uniform samples. */
  csv(interval = 100, silent = 100_000): string {
    const rows = ["time (s),SCL,SDA"];
    let next = 0;
    for (let at = 0; at <= this.at + silent; at += interval) {
      while (next + 1 < this.moves.length && this.moves[next + 1].tick <= at) next++;
      const { scl, sda } = this.moves[next];
      rows.push(`${(at / 1e9).toFixed(9)},${scl},${sda}`);
    }
    return `${rows.join("\r\n")}\r\n`;
  }

  edges(): EdgeBlock {
    const ticks = Float64Array.from(this.moves, (moved) => moved.tick);
    const lines = Uint8Array.from(this.moves, ({ scl, sda }) => (scl ? SCL : 0) | (sda ? SDA : 0));
    return { length: this.moves.length, ticks, lines, volts: null };
  }
}

export const SCRIPT_HEAD: CaptureHead = {
  format: "vcd",
  levels: "digital",
  gzip: false,
  timebase: { ticksPerSecond: 1e9, origin: "file" },
  startTick: 0,
  sampleTicks: null,
  channels: [
    { id: "top.SCL", name: "SCL", unit: null, kind: "digital" },
    { id: "top.SDA", name: "SDA", unit: null, kind: "digital" },
  ],
  proposal: { scl: "top.SCL", sda: "top.SDA", basis: "given", reason: "given" },
  taps: [],
  vdd_v: null,
  vil_v: null,
  vih_v: null,
  warnings: [],
  metadata: [],
};

/** A capture that hands on these blocks. */
export function captureOf(
  blocks: readonly EdgeBlock[],
  endTick: number,
  head: CaptureHead = SCRIPT_HEAD,
  excursions: readonly Excursion[] = [],
): OpenCapture {
  const tail: CaptureTail = {
    endTick,
    samples: blocks.reduce((sum, block) => sum + block.length, 0),
    sclEdges: 0,
    sdaEdges: 0,
    rowsSetAside: 0,
    excursions,
    excursionCount: excursions.length,
    warnings: [],
  };
  return {
    head,
    async read(sink) {
      for (const block of blocks) sink.edges(block);
      sink.progress(1);
      return ok(tail);
    },
  };
}

export const SETTINGS: AnalysisSettings = { read: {}, limits: null, cb_pf: null, roster: [], log: [] };

/** Analyses a capture and gives the whole report. */
export async function reportOf(capture: OpenCapture, settings: Partial<AnalysisSettings> = {}): Promise<Report> {
  const store = new TransactionStore();
  const outcome = await analyze(
    capture,
    { ...SETTINGS, ...settings },
    {
      head() {},
      edges() {},
      tap() {},
      transactions: (block, bytes) => store.add(block, bytes),
      progress() {},
    },
  );
  if (!outcome.ok) throw new Error(outcome.problem.message);
  const { summary, attribution } = outcome;
  return wholeReport(summary, store.rows(capture.head.timebase, attribution, summary.controllers));
}

/** The same from a script; `silent` ns follow its last move. */
export function scripted(
  script: LineScript,
  silent = 100_000,
  settings: Partial<AnalysisSettings> = {},
  head: CaptureHead = SCRIPT_HEAD,
): Promise<Report> {
  return reportOf(captureOf([script.edges()], script.now + silent, head), settings);
}

export type { Report, Summary };
