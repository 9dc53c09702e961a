import { describe, expect, it } from "vitest";
import { LineWatch } from "@/lib/diagnosis/places";
import { type EdgeBlock, SCL, SDA } from "@/lib/engine/samples/edges";

/** SCL turns over at every tenth tick from `from` on, high at even tens; SDA stays high. */
function clock(from: number, length: number): EdgeBlock {
  const ticks = Float64Array.from({ length }, (_, i) => from + 10 * i);
  const lines = Uint8Array.from({ length }, (_, i) => SDA | ((from / 10 + i) % 2 === 0 ? SCL : 0));
  return { length, ticks, lines, volts: null };
}

/** What the browser's worker does with a block once it was read. */
function handOver(block: EdgeBlock): void {
  structuredClone(block, { transfer: [block.ticks.buffer, block.lines.buffer] as ArrayBuffer[] });
}

describe("what the lines did a moment ago", () => {
  it.each([
    ["kept", () => undefined],
    ["handed over", handOver],
  ])("is known where blocks are %s", (_, done: (block: EdgeBlock) => void) => {
    const watch = new LineWatch();
    const blocks = [clock(1000, 500), clock(6000, 500)];
    for (const block of blocks) {
      watch.push(block);
      // Inside the newest block, and at the end of the one before.
      expect(watch.sclHighAt(block.ticks[200] + 5)).toBe((block.ticks[200] / 10) % 2 === 0);
      done(block);
    }
    for (const tick of [5965, 5975, 10_985, 10_995])
      expect([tick, watch.sclHighAt(tick)]).toEqual([tick, Math.floor(tick / 10) % 2 === 0]);
    expect(watch.sclHighAt(10)).toBeNull();
    expect(watch.atEnd()).toMatchObject({ scl: 0, sda: 1, sclSince: 10_990 });
  });
});
