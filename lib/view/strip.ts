// In: the edges and a time scale. Out: the scene of the strip: one entry per pixel column and line saying how the line
// stands and whether it moves, exactly: a pulse of one tick in a record of an hour still marks its column.

import { type EdgeColumns, type Line, levelOf } from "./edges";
import { type Bounds, type TimeScale, tickAt } from "./scale";

/** Level of the line as a column begins: 0, 1, 2 unknown, 3 outside the record. */
export const OUTSIDE = 3;

export interface LineStrip {
  readonly enter: Uint8Array;
  /** Changes inside the column, at most 255. */
  readonly changes: Uint8Array;
}

export interface StripColumns {
  readonly scl: LineStrip;
  readonly sda: LineStrip;
  /** Index of the first edge at or after each column's left side, and one more for the right side of the last. */
  readonly first: Float64Array;
}

export function stripColumns(edges: EdgeColumns, scale: TimeScale, record: Bounds): StripColumns {
  const width = Math.ceil(scale.width);
  const strips: Record<Line, LineStrip> = {
    scl: { enter: new Uint8Array(width), changes: new Uint8Array(width) },
    sda: { enter: new Uint8Array(width), changes: new Uint8Array(width) },
  };
  const first = new Float64Array(width + 1);
  let index = edges.seek(scale.origin);
  first[0] = index;
  const counts: Record<Line, number> = { scl: edges.changesBefore("scl", index), sda: edges.changesBefore("sda", index) };
  for (let x = 0; x < width; x++) {
    const next = edges.seek(tickAt(scale, x + 1), index);
    const inside = tickAt(scale, x + 1) > record.from && tickAt(scale, x) <= record.to && edges.length > 0;
    const lines = inside ? edges.lines(index - 1) : 0;
    for (const line of ["scl", "sda"] as const) {
      strips[line].enter[x] = inside ? levelOf(lines, line) : OUTSIDE;
      if (next === index) continue;
      const total = edges.changesBefore(line, next);
      strips[line].changes[x] = Math.min(255, total - counts[line]);
      counts[line] = total;
    }
    index = next;
    first[x + 1] = index;
  }
  return { scl: strips.scl, sda: strips.sda, first };
}

/** Nearest edge to a tick, of one line or of either, within `reach` ticks; -1 where there is none. */
export function nearestEdge(edges: EdgeColumns, tick: number, reach: number): number {
  const after = edges.seek(tick);
  const candidates = [after - 1, after].filter((k) => k >= 0 && k < edges.length);
  let best = -1;
  for (const k of candidates) {
    const distance = Math.abs(edges.tick(k) - tick);
    if (distance <= reach && (best < 0 || distance < Math.abs(edges.tick(best) - tick))) best = k;
  }
  return best;
}
