import type { PlacedLog } from "@/lib/diagnosis/report";
import { type Bounds, endOf, type TimeScale, xOf } from "@/lib/view/scale";
import type { Ink } from "./ink";

// What stands beside the lines on the strip: a controller's log, and notes and tags on a stretch of the record. All lengths are
// CSS pixels; the caller has scaled the context.

/** A note or a tag on a stretch, as the strip names it. */
export interface Span extends Bounds {
  /** Footnote number, or the word of a tag. */
  readonly label: string;
}

/** Narrowest room in which a line of the log gets its words. */
const WORDS = 40;

/** Each line of the log at its time, as far as there is room in words; a reported loss in the colour of contests. */
export function paintLog(
  context: CanvasRenderingContext2D,
  log: PlacedLog,
  scale: TimeScale,
  perSecond: number,
  top: number,
  ink: Ink,
): void {
  const right = endOf(scale);
  const seen = log.lines.filter(({ time_s }) => time_s * perSecond >= scale.origin && time_s * perSecond <= right);
  context.font = `11px ${ink.mono}`;
  context.textAlign = "left";
  context.lineWidth = 1;
  for (const [place, line] of seen.entries()) {
    const x = Math.round(xOf(scale, line.time_s * perSecond)) + 0.5;
    const next = place + 1 < seen.length ? xOf(scale, seen[place + 1].time_s * perSecond) : scale.width;
    context.strokeStyle = context.fillStyle = line.loss ? ink.contest : ink.quiet;
    context.beginPath();
    context.moveTo(x, top);
    context.lineTo(x, top + 16);
    context.stroke();
    if (next - x < WORDS) continue;
    const text = line.controller === null ? line.message : `${line.controller}: ${line.message}`;
    context.fillText(fitting(context, text, next - x - 10), x + 4, top + 12);
  }
}

function fitting(context: CanvasRenderingContext2D, text: string, room: number): string {
  if (context.measureText(text).width <= room) return text;
  const each = context.measureText("m").width;
  return `${text.slice(0, Math.max(0, Math.floor(room / each) - 1))}…`;
}

/** A thin rule over each stretch that carries a note or a tag, its number or word at the left end. */
export function paintSpans(context: CanvasRenderingContext2D, spans: readonly Span[], scale: TimeScale, ink: Ink): void {
  context.strokeStyle = context.fillStyle = ink.accent;
  context.font = `11px ${ink.serif}`;
  context.textAlign = "left";
  context.lineWidth = 1;
  for (const span of spans) {
    const from = xOf(scale, span.from);
    const to = Math.max(xOf(scale, span.to), from + 2);
    if (to < 0 || from > scale.width) continue;
    context.beginPath();
    context.moveTo(from + 0.5, 12);
    context.lineTo(from + 0.5, 8.5);
    context.lineTo(to - 0.5, 8.5);
    context.lineTo(to - 0.5, 12);
    context.stroke();
    context.fillText(span.label, Math.max(from, 0) + 3, 6.5);
  }
}
