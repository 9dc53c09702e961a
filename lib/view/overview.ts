// In: the ledger, the marks and the width of the drawing. Out: the scene of the overview: how busy the bus was in every few
// pixels of the whole recording, and where faults, contests, tags and notes stand.

import type { Summary } from "../diagnosis/report";
import { FAULT_WORDS } from "../diagnosis/wording";
import type { EdgeColumns } from "./edges";
import type { Ledger } from "./ledger";
import { type Bounds, fitted, type TimeScale, tickAt, xOf } from "./scale";

export interface OverviewMark {
  readonly x: number;
  readonly kind: "fault" | "contest" | "tag" | "note";
  /** How many fell on this place. */
  readonly count: number;
  /** The first of them, or null where it stands on no transaction. */
  readonly transaction: number | null;
  readonly tick: number;
}

export interface OverviewScene {
  readonly scale: TimeScale;
  /** Height of each density tick, 0 to 1, one every `pitch` pixels. */
  readonly density: Float32Array;
  readonly pitch: number;
  readonly marks: readonly OverviewMark[];
}

/** Pixels between density ticks, and between marks of one kind that are drawn apart. */
const PITCH = 4;
const APART = 9;

/** Square root of the share of the busiest place: a quiet place next to a burst is still seen. */
function densityOf(edges: EdgeColumns, scale: TimeScale): Float32Array {
  const places = Math.ceil(scale.width / PITCH);
  const counts = new Float64Array(places);
  let index = 0;
  let most = 0;
  for (let k = 0; k < places; k++) {
    const next = k === places - 1 ? edges.length : edges.seek(tickAt(scale, (k + 1) * PITCH), index);
    counts[k] = next - index;
    most = Math.max(most, counts[k]);
    index = next;
  }
  return Float32Array.from(counts, (value) => (most === 0 ? 0 : Math.sqrt(value / most)));
}

interface Placed {
  readonly kind: OverviewMark["kind"];
  readonly tick: number;
  readonly transaction: number | null;
}

function gathered(places: readonly Placed[], scale: TimeScale): OverviewMark[] {
  const marks: OverviewMark[] = [];
  const last = new Map<OverviewMark["kind"], number>();
  for (const place of [...places].sort((a, b) => a.tick - b.tick)) {
    const x = xOf(scale, place.tick);
    const at = last.get(place.kind);
    if (at !== undefined && x - marks[at].x < APART) {
      marks[at] = { ...marks[at], count: marks[at].count + 1 };
      continue;
    }
    last.set(place.kind, marks.length);
    marks.push({ x, kind: place.kind, count: 1, transaction: place.transaction, tick: place.tick });
  }
  return marks;
}

export interface OverviewInput {
  readonly edges: EdgeColumns;
  readonly ledger: Ledger;
  readonly summary: Summary | null;
  readonly ticksPerSecond: number;
  readonly record: Bounds;
  readonly tagged: readonly number[];
  readonly noted: readonly number[];
  /** Stretches of the record that carry a tag or a note of their own, by their first tick. */
  readonly spans: readonly { readonly kind: "tag" | "note"; readonly from: number }[];
}

export function overviewScene(input: OverviewInput, width: number): OverviewScene {
  const scale = fitted(input.record, width);
  const at = (transaction: number) =>
    transaction < input.ledger.length ? input.ledger.startTick(transaction) : input.record.from;
  const places: Placed[] = [];
  for (const contest of input.summary?.contests ?? []) {
    places.push({ kind: "contest", tick: contest.decided_s * input.ticksPerSecond, transaction: contest.transaction });
  }
  for (const fault of input.summary?.faults ?? []) {
    if (!FAULT_WORDS[fault.kind].fails) continue;
    places.push({ kind: "fault", tick: fault.time_s * input.ticksPerSecond, transaction: fault.transaction });
  }
  for (const violation of input.summary?.violations ?? []) {
    places.push({ kind: "fault", tick: violation.time_s * input.ticksPerSecond, transaction: violation.transaction });
  }
  for (const transaction of input.tagged) places.push({ kind: "tag", tick: at(transaction), transaction });
  for (const transaction of input.noted) places.push({ kind: "note", tick: at(transaction), transaction });
  for (const { kind, from } of input.spans) places.push({ kind, tick: from, transaction: null });
  return { scale, density: densityOf(input.edges, scale), pitch: PITCH, marks: gathered(places, scale) };
}

/** The mark nearest to `x` within `reach` pixels, or null. */
export function markAt(scene: OverviewScene, x: number, reach: number): OverviewMark | null {
  let best: OverviewMark | null = null;
  for (const mark of scene.marks) {
    const distance = Math.abs(mark.x - x);
    if (distance <= reach && (best === null || distance < Math.abs(best.x - x))) best = mark;
  }
  return best;
}
