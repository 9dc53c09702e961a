import type { Capture } from "@/lib/view/capture";
import { type EdgeColumns, type Line, levelOf } from "@/lib/view/edges";
import { hex } from "@/lib/view/format";
import { transactionsIn } from "@/lib/view/hit";
import { type Bounds, endOf, type TimeScale, xOf } from "@/lib/view/scale";
import { stripColumns } from "@/lib/view/strip";
import type { Ink } from "./ink";

// Paints the lanes of the strip. All lengths are CSS pixels; the caller has scaled the context.

export interface Lane {
  readonly label: string;
  readonly edges: EdgeColumns;
  readonly line: Line;
  /** Top of level 1 and of level 0. */
  readonly high: number;
  readonly low: number;
  readonly heavy: boolean;
}

/** Up to so many edges in view every one is drawn at its own place; above that, one column of pixels at a time. */
function exactLimit(scale: TimeScale): number {
  return 2 * scale.width;
}

function yOf(lane: Lane, level: number): number {
  return level === 1 ? lane.high : lane.low;
}

function exact(
  context: CanvasRenderingContext2D,
  lane: Lane,
  scale: TimeScale,
  record: Bounds,
  first: number,
  last: number,
): void {
  const start = Math.max(0, xOf(scale, record.from));
  const end = Math.min(scale.width, xOf(scale, record.to));
  if (end <= start || lane.edges.length === 0) return;
  let level = levelOf(lane.edges.lines(first - 1), lane.line);
  context.moveTo(start, yOf(lane, level));
  for (let k = first; k < last; k++) {
    const next = levelOf(lane.edges.lines(k), lane.line);
    if (next === level) continue;
    const x = xOf(scale, lane.edges.tick(k));
    if (level === 2) context.moveTo(x, yOf(lane, next));
    else context.lineTo(x, yOf(lane, level));
    if (next !== 2) context.lineTo(x, yOf(lane, next));
    level = next;
  }
  if (level !== 2) context.lineTo(end, yOf(lane, level));
}

/** Columns so full that single edges cannot be told are toned, all others are inked: a lone glitch stays black. */
function columns(
  context: CanvasRenderingContext2D,
  lane: Lane,
  strip: { enter: Uint8Array; changes: Uint8Array },
  ink: Ink,
): void {
  const { enter, changes } = strip;
  const width = enter.length;
  const full = (x: number) => changes[x] >= 2 && (changes[x - 1] ?? 0) >= 2 && (changes[x + 1] ?? 0) >= 2;
  context.lineWidth = 1;
  context.strokeStyle = ink.field;
  context.beginPath();
  for (let x = 0; x < width; x++) if (full(x)) upright(context, lane, x);
  context.stroke();
  context.strokeStyle = ink.ink;
  context.beginPath();
  for (let x = 0; x < width; x++) if (changes[x] > 0 && !full(x)) upright(context, lane, x);
  context.stroke();
  context.lineWidth = lane.heavy ? 2 : 1;
  context.beginPath();
  let from = 0;
  for (let x = 0; x < width; x++) {
    if (x + 1 < width && enter[x + 1] === enter[from] && changes[x] === 0) continue;
    if (enter[from] < 2 && !(changes[x] > 0 && x === from)) {
      context.moveTo(from, yOf(lane, enter[from]));
      context.lineTo(x + 1, yOf(lane, enter[from]));
    }
    from = x + 1;
  }
  context.stroke();
}

function upright(context: CanvasRenderingContext2D, lane: Lane, x: number): void {
  context.moveTo(x + 0.5, lane.high);
  context.lineTo(x + 0.5, lane.low);
}

/** Draws the lanes; returns how many edges are in view. */
export function paintLanes(
  context: CanvasRenderingContext2D,
  lanes: readonly Lane[],
  scale: TimeScale,
  record: Bounds,
  ink: Ink,
): number {
  let inView = 0;
  const made = new Map<EdgeColumns, ReturnType<typeof stripColumns>>();
  for (const lane of lanes) {
    const first = lane.edges.seek(scale.origin);
    const last = lane.edges.seek(endOf(scale), first);
    inView = Math.max(inView, last - first);
    if (last - first > exactLimit(scale)) {
      const known = made.get(lane.edges) ?? stripColumns(lane.edges, scale, record);
      made.set(lane.edges, known);
      columns(context, lane, known[lane.line], ink);
      continue;
    }
    context.strokeStyle = ink.ink;
    context.lineWidth = lane.heavy ? 2 : 1;
    context.beginPath();
    exact(context, lane, scale, record, first, last);
    context.stroke();
  }
  return inView;
}

function brace(context: CanvasRenderingContext2D, from: number, to: number, y: number): void {
  const r = Math.min(5, (to - from) / 4);
  const middle = (from + to) / 2;
  context.moveTo(from, y);
  context.quadraticCurveTo(from, y + 3.5, from + r, y + 3.5);
  context.lineTo(middle - r, y + 3.5);
  context.quadraticCurveTo(middle, y + 3.5, middle, y + 7);
  context.quadraticCurveTo(middle, y + 3.5, middle + r, y + 3.5);
  context.lineTo(to - r, y + 3.5);
  context.quadraticCurveTo(to, y + 3.5, to, y);
}

/** Transactions in view up to which the score is written, and the narrowest byte that gets its value. */
const SCORED = 400;
const NARROWEST = 15;

/** The score of every transaction in view: conditions, braces with their values, acknowledges. */
export function paintScore(context: CanvasRenderingContext2D, capture: Capture, scale: TimeScale, y: number, ink: Ink): void {
  const { ledger } = capture;
  const { first, end } = transactionsIn(ledger, scale.origin, endOf(scale));
  if (end - first > SCORED) return;
  context.textAlign = "center";
  context.lineWidth = 1;
  for (let index = first; index < end; index++) {
    const row = ledger.row(index);
    context.font = `700 13px ${ink.serif}`;
    context.fillStyle = ink.ink;
    if (xOf(scale, row.endTick) - xOf(scale, row.startTick) > 12) {
      context.fillText(row.opens, xOf(scale, row.startTick), y + 13);
      if (row.closes === "P") context.fillText("P", xOf(scale, row.endTick), y + 13);
    }
    const shown = Math.min(row.byteCount, 4096);
    for (let k = 0; k < shown; k++) {
      const byte = ledger.byte(row.firstByte + k);
      const nine = (byte.endTick - byte.startTick) / scale.ticksPerPixel;
      const from = xOf(scale, byte.startTick);
      // The byte's own span holds nine pulses; eight of them lie under the brace.
      const to = from + (nine * Math.min(8, Math.max(1, byte.bits))) / (byte.bits < 8 ? Math.max(1, byte.bits) : 9);
      if (to < 0 || from > scale.width || nine < NARROWEST) continue;
      context.strokeStyle = ink.field;
      context.beginPath();
      brace(context, from, to - 2, y);
      context.stroke();
      context.font = `12px ${ink.mono}`;
      context.fillStyle = byte.bits < 8 ? ink.broken : ink.ink;
      context.fillText(byte.bits < 8 ? "…" : hex(byte.value), (from + to) / 2, y + 19);
      if (byte.ack === null || nine < 40) continue;
      context.font = `11px ${ink.mono}`;
      context.fillStyle = byte.ack ? ink.quiet : k < row.addressBytes ? ink.broken : ink.ink;
      context.fillText(byte.ack ? "A" : "N", from + (nine * 8.5) / 9, y + 10);
    }
  }
}

/** The selected transaction between two thin uprights, the deciding bit of each contest in view hatched. */
export function paintMarks(
  context: CanvasRenderingContext2D,
  capture: Capture,
  scale: TimeScale,
  selected: number | null,
  height: number,
  ink: Ink,
): void {
  const perSecond = capture.head.timebase.ticksPerSecond;
  for (const contest of capture.summary?.contests ?? []) {
    const x = xOf(scale, contest.decided_s * perSecond);
    if (x < 0 || x > scale.width) continue;
    context.strokeStyle = ink.contest;
    context.lineWidth = 1;
    context.setLineDash([3, 3]);
    context.beginPath();
    context.moveTo(x, 0);
    context.lineTo(x, height);
    context.stroke();
    context.setLineDash([]);
    context.beginPath();
    for (let y = 0; y < height; y += 5) {
      context.moveTo(x, y + 5);
      context.lineTo(x + 5, y);
    }
    context.stroke();
  }
  if (selected === null || selected >= capture.ledger.length) return;
  const from = xOf(scale, capture.ledger.startTick(selected));
  const to = xOf(scale, capture.ledger.endTick(selected));
  context.strokeStyle = ink.accent;
  context.lineWidth = 2;
  context.beginPath();
  context.moveTo(from, 1);
  context.lineTo(Math.max(to, from + 2), 1);
  context.moveTo(from, 0);
  context.lineTo(from, 7);
  context.moveTo(Math.max(to, from + 2), 0);
  context.lineTo(Math.max(to, from + 2), 7);
  context.stroke();
}
