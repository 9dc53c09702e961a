// In: everything the analysis tells while it runs. Out: the capture as the page holds it: blocks kept as they came, the head,
// and at the end the summary. Nothing here is copied per row; React is told a version number and asks for what it draws.

import type { AnalysisOutcome } from "../diagnosis/analysis";
import type { Summary } from "../diagnosis/report";
import type { ByteBlock, TransactionBlock } from "../engine/bus/transactions";
import type { EdgeBlock } from "../engine/samples/edges";
import type { CaptureHead } from "../engine/samples/reader";
import { EdgeColumns } from "./edges";
import { Ledger } from "./ledger";
import { type Marks, marksOf } from "./marks";
import type { Bounds } from "./scale";

export class Capture {
  readonly head: CaptureHead;
  readonly edges = new EdgeColumns();
  readonly taps: readonly EdgeColumns[];
  readonly ledger = new Ledger();
  summary: Summary | null = null;
  marks: Marks = marksOf(null);
  /** Per transaction, index into summary.controllers or -1. */
  attribution: Int16Array | null = null;

  constructor(head: CaptureHead) {
    this.head = head;
    this.taps = head.taps.map(() => new EdgeColumns());
  }

  /** The decoder tells of transactions before their edges have come over; they wait here until they can be drawn. */
  #waiting: { readonly block: TransactionBlock; readonly bytes: ByteBlock }[] = [];

  appendEdges(block: EdgeBlock): void {
    this.edges.append(block);
    this.#admit(this.edges.length);
  }

  #admit(edges: number): void {
    let admitted = 0;
    for (const { block, bytes } of this.#waiting) {
      if (block.length > 0 && block.endEdge[block.length - 1] >= edges) break;
      this.ledger.append(block, bytes);
      admitted++;
    }
    if (admitted > 0) this.#waiting = this.#waiting.slice(admitted);
  }

  appendTap(index: number, block: EdgeBlock): void {
    this.taps[index]?.append(block);
  }

  appendTransactions(block: TransactionBlock, bytes: ByteBlock): void {
    this.#waiting.push({ block, bytes });
    this.#admit(this.edges.length);
  }

  conclude(outcome: Extract<AnalysisOutcome, { ok: true }>): void {
    this.#admit(Number.POSITIVE_INFINITY);
    this.summary = outcome.summary;
    this.attribution = outcome.attribution;
    this.marks = marksOf(outcome.summary);
  }

  /** The recorded span; while the file is still being read, up to the last edge that arrived. */
  get record(): Bounds {
    const { ticksPerSecond } = this.head.timebase;
    if (this.summary) {
      const { start_s, duration_s } = this.summary.capture;
      return { from: Math.round(start_s * ticksPerSecond), to: Math.round((start_s + duration_s) * ticksPerSecond) };
    }
    const last = this.edges.length > 0 ? this.edges.tick(this.edges.length - 1) : this.head.startTick + 1;
    return { from: this.head.startTick, to: Math.max(last, this.head.startTick + 1) };
  }

  /** Name or id of the controller that made a transaction, or null. */
  controller(transaction: number): string | null {
    const at = this.attribution?.[transaction] ?? -1;
    const row = at >= 0 ? this.summary?.controllers[at] : undefined;
    return row ? (row.name ?? row.id) : null;
  }
}

/** Ticks per pixel at which most rows fit `width`: the ninth decile of the lengths, not led astray by a few long ones. */
export function usualScale(ledger: Ledger, width: number): number {
  const total = ledger.length;
  if (total === 0) return 1;
  const every = Math.max(1, Math.floor(total / 2000));
  const lengths: number[] = [];
  for (let k = 0; k < total; k += every) lengths.push(ledger.endTick(k) - ledger.startTick(k));
  lengths.sort((a, b) => a - b);
  const at = (share: number) => lengths[Math.min(lengths.length - 1, Math.floor(lengths.length * share))];
  const length = Math.min(at(0.9), 3 * Math.max(1, at(0.5)));
  return Math.max(1 / 50, length / Math.max(50, width - 40));
}
