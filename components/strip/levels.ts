import type { Capture } from "@/lib/view/capture";
import type { EdgeColumns, Line } from "@/lib/view/edges";
import { endOf, type TimeScale, tickAt } from "@/lib/view/scale";

// Voltage lanes of the strip: the mean level of each line from one edge to the next, as two points per pixel column at most.

/** Edges looked at in one pixel column; in denser columns every n-th. */
const LOOKED = 48;

function mean(edges: EdgeColumns, index: number, line: Line): number {
  const { block, offset } = edges.at(index);
  if (!block.volts) return Number.NaN;
  return line === "scl" ? block.volts.meanScl[offset] : block.volts.meanSda[offset];
}

export interface LevelData {
  readonly x: number[];
  readonly scl: (number | null)[];
  readonly sda: (number | null)[];
}

function known(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}

function exactLevels(edges: EdgeColumns, scale: TimeScale, first: number, last: number): LevelData {
  const data: LevelData = { x: [], scl: [], sda: [] };
  const push = (x: number, index: number) => {
    data.x.push(x);
    data.scl.push(known(mean(edges, index, "scl")));
    data.sda.push(known(mean(edges, index, "sda")));
  };
  for (let k = Math.max(0, first - 1); k < last; k++) {
    push(Math.max(scale.origin, edges.tick(k)), k);
    push(k + 1 < edges.length ? Math.min(endOf(scale), edges.tick(k + 1)) : endOf(scale), k);
  }
  return data;
}

/** Levels in view, ready for the plot: ticks on x, volts on y, null where nothing settled. */
export function levelData(capture: Capture, scale: TimeScale): LevelData {
  const { edges } = capture;
  const first = edges.seek(scale.origin);
  const last = edges.seek(endOf(scale), first);
  if (edges.length === 0) return { x: [], scl: [], sda: [] };
  if (last - first <= 2 * scale.width) return exactLevels(edges, scale, first, last);
  const data: LevelData = { x: [], scl: [], sda: [] };
  let index = first;
  for (let x = 0; x < scale.width; x++) {
    const next = edges.seek(tickAt(scale, x + 1), index);
    const step = Math.max(1, Math.floor((next - index) / LOOKED));
    const low = { scl: Number.POSITIVE_INFINITY, sda: Number.POSITIVE_INFINITY };
    const high = { scl: Number.NEGATIVE_INFINITY, sda: Number.NEGATIVE_INFINITY };
    for (let k = Math.max(0, index - 1); k < next; k += step) {
      for (const line of ["scl", "sda"] as const) {
        const value = mean(edges, k, line);
        if (value < low[line]) low[line] = value;
        if (value > high[line]) high[line] = value;
      }
    }
    index = next;
    data.x.push(tickAt(scale, x), tickAt(scale, x + 0.5));
    for (const line of ["scl", "sda"] as const) data[line].push(finite(low[line]), finite(high[line]));
  }
  return data;
}

function finite(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
