// In: a line's changes in ticks and a scale. Out: the path that draws it between two heights, as SVG path data. Where several
// changes fall into one pixel they become one upright stroke, so a path never has more parts than the drawing has pixels,
// and a pulse of one tick is still drawn.

import type { Brace, LineChanges } from "./row";

export interface PathFrame {
  /** Pixels per tick and pixel of tick 0. */
  readonly scale: number;
  readonly shift: number;
  /** Drawn from `left` to `right`, pixels. */
  readonly left: number;
  readonly right: number;
  /** Heights of level 1 and of level 0. */
  readonly high: number;
  readonly low: number;
}

function round(value: number): number {
  return Math.round(value * 100) / 100;
}

export interface LinePath {
  /** Known levels. */
  readonly path: string;
  /** Spans in which the line is unknown: two faint levels with no line between. */
  readonly unknown: string;
}

/** First change at or after pixel `x`. */
function firstAt(changes: LineChanges, frame: PathFrame, x: number): number {
  let low = 0;
  let high = changes.at.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (changes.at[middle] * frame.scale + frame.shift < x) low = middle + 1;
    else high = middle;
  }
  return low;
}

export function linePath(changes: LineChanges, frame: PathFrame): LinePath {
  const parts: string[] = [];
  const unknown: string[] = [];
  const y = (level: 0 | 1 | 2) => (level === 1 ? frame.high : frame.low);
  let k = firstAt(changes, frame, frame.left);
  let level = k === 0 ? changes.before : changes.levels[k - 1];
  let x = frame.left;
  if (level !== 2) parts.push(`M${round(x)} ${y(level)}`);
  while (x < frame.right) {
    const next = k < changes.at.length ? Math.min(frame.right, changes.at[k] * frame.scale + frame.shift) : frame.right;
    if (level === 2) unknown.push(`M${round(x)} ${frame.high}H${round(next)}M${round(x)} ${frame.low}H${round(next)}`);
    else parts.push(`H${round(next)}`);
    x = next;
    if (k >= changes.at.length || x >= frame.right) break;
    const end = x + 0.5;
    const from = level;
    let both = false;
    do {
      const to = changes.levels[k];
      if (to !== 2 && from !== 2 && to === from) both = true;
      level = to;
      k++;
    } while (k < changes.at.length && changes.at[k] * frame.scale + frame.shift < end);
    if (level === 2) continue;
    if (from === 2) parts.push(`M${round(x)} ${y(level)}`);
    else if (level === from && both) parts.push(`V${from === 1 ? frame.low : frame.high}V${y(level)}`);
    else parts.push(`V${y(level)}`);
  }
  return { path: parts.join(""), unknown: unknown.join("") };
}

/** A brace lying under its bits, its point downwards in the middle. */
export function bracePath(from: number, to: number, top: number, depth: number): string {
  const r = Math.min(depth, (to - from) / 4);
  const middle = round((from + to) / 2);
  const [a, b, base, tip] = [round(from), round(to), round(top + depth / 2), round(top + depth)];
  return (
    `M${a} ${top}Q${a} ${base} ${round(from + r)} ${base}H${round(middle - r)}Q${middle} ${base} ${middle} ${tip}` +
    `Q${middle} ${base} ${round(middle + r)} ${base}H${round(to - r)}Q${b} ${base} ${b} ${top}`
  );
}

/** Whether a brace is wide enough to be told from its neighbours at this scale. */
export function braceShown(brace: Brace, scale: number): boolean {
  return (brace.to - brace.from) * scale >= 14;
}
