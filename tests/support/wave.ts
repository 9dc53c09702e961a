// Two lines of high and low marks become edges; columns are time. "‾" or "#" is high, "_" low, "x" unknown.

import { type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "@/lib/engine/samples/edges";

/** One instant: a tick and the levels from then on (2 is unknown). */
export interface Instant {
  readonly tick: number;
  readonly scl: 0 | 1 | 2;
  readonly sda: 0 | 1 | 2;
}

function level(mark: string): 0 | 1 | 2 {
  if (mark === "x") return 2;
  return mark === "_" ? 0 : 1;
}

export function draw(scl: string, sda: string, step = 1): Instant[] {
  if (scl.length !== sda.length) throw new Error("the two lines differ in length");
  const out: Instant[] = [];
  for (let i = 0; i < scl.length; i++) {
    const now = { tick: i * step, scl: level(scl[i]), sda: level(sda[i]) };
    const last = out[out.length - 1];
    if (last === undefined || last.scl !== now.scl || last.sda !== now.sda) out.push(now);
  }
  return out;
}

export function toBlock(instants: readonly Instant[]): EdgeBlock {
  const lines = instants.map(
    ({ scl, sda }) =>
      (scl === 1 ? SCL : 0) | (sda === 1 ? SDA : 0) | (scl === 2 ? SCL_UNKNOWN : 0) | (sda === 2 ? SDA_UNKNOWN : 0),
  );
  return {
    length: instants.length,
    ticks: Float64Array.from(instants, (i) => i.tick),
    lines: Uint8Array.from(lines),
    volts: null,
  };
}

/** The same edges in several blocks, cut before the given entries. */
export function cut(block: EdgeBlock, at: readonly number[]): EdgeBlock[] {
  const bounds = [0, ...[...new Set(at)].filter((n) => n > 0 && n < block.length).sort((a, b) => a - b), block.length];
  return bounds.slice(1).map((to, i) => ({
    length: to - bounds[i],
    ticks: block.ticks.slice(bounds[i], to),
    lines: block.lines.slice(bounds[i], to),
    volts: null,
  }));
}
