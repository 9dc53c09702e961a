import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { decodeBlock, encodeBlock, gridOf } from "@/lib/engine/archive/block";
import { isArchive, openArchive } from "@/lib/engine/archive/reader";
import { createArchiveWriter } from "@/lib/engine/archive/writer";
import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "@/lib/engine/samples/edges";
import type { CaptureHead, CaptureTail } from "@/lib/engine/samples/reader";
import { openVcd } from "@/lib/engine/samples/vcd";
import { host } from "@/workers/host";
import { readOut, sourceOf, vcdOf } from "../support/vcd";
import { changesOf, write } from "../support/vcd-bus";

const HEAD: CaptureHead = {
  format: "csv",
  levels: "digital",
  gzip: true,
  timebase: { ticksPerSecond: 1e12, origin: "file" },
  startTick: -500,
  sampleTicks: 100_000,
  channels: [{ id: "@2", name: "SCL \u00b5 \ud83d\udd0c", unit: null, kind: "digital" }],
  proposal: { scl: "@2", sda: "@3", basis: "names", reason: "by their names" },
  taps: [{ label: "M1", scl: "@4", sda: null, polarity: "drive" }],
  vdd_v: null,
  vil_v: null,
  vih_v: null,
  warnings: [{ code: "channels-assumed", message: "assumed", line: 3, count: 1 }],
  metadata: [["Model", "any"]],
};
const TAIL: CaptureTail = {
  endTick: 1e9,
  samples: 10,
  sclEdges: 4,
  sdaEdges: 2,
  rowsSetAside: 1,
  excursions: [{ line: "scl", tick: 5, width: 3, extreme_v: Number.NaN }],
  excursionCount: 1,
  warnings: [],
};

async function packed(head: CaptureHead, blocks: readonly EdgeBlock[], taps: readonly EdgeBlock[] = []): Promise<Uint8Array> {
  const writer = createArchiveWriter(head, host.deflate);
  for (const block of blocks) writer.edges(block);
  for (const block of taps) writer.tap(0, block);
  return new Uint8Array(await new Blob(await writer.finish(TAIL)).arrayBuffer());
}

const digital = (ticks: readonly number[], lines: readonly number[]): EdgeBlock => ({
  length: ticks.length,
  ticks: Float64Array.from(ticks),
  lines: Uint8Array.from(lines),
  volts: null,
});

/** Any sequence that an edge block may hold, on a grid of its own. */
const edges = fc
  .record({
    start: fc.integer({ min: -1e9, max: 1e12 }),
    step: fc.constantFrom(1, 7, 1000, 100_000, 12_345_678),
    entries: fc.array(
      fc.tuple(
        fc.oneof(fc.integer({ min: 1, max: 300 }), fc.integer({ min: 1, max: 40_000_000 })),
        fc.constantFrom(0, SCL, SDA, SCL | SDA, SCL_UNKNOWN, SCL | SDA_UNKNOWN, SCL_UNKNOWN | SDA_UNKNOWN, SCL | SDA | CUT, CUT),
      ),
      { minLength: 1, maxLength: 200 },
    ),
  })
  .map(({ start, step, entries }) => {
    let tick = start;
    const ticks: number[] = [];
    const lines: number[] = [];
    for (const [steps, now] of entries) {
      if (lines.length > 0 && now === (lines[lines.length - 1] & ~CUT)) continue;
      ticks.push(tick);
      lines.push(now);
      tick += steps * step;
    }
    return digital(ticks, lines);
  });

describe("one block", () => {
  it("comes back as it was", () => {
    fc.assert(
      fc.property(edges, (block) => {
        const back = decodeBlock(encodeBlock(block, 1), block.length, false, 1);
        expect(back).toEqual(block);
      }),
      { numRuns: 300 },
    );
  });

  it("finds the sample grid", () => {
    expect(gridOf(Float64Array.of(50, 1050, 4050, 4550), 4)).toBe(500);
    expect(gridOf(Float64Array.of(0, 6e12, 15e12), 3)).toBe(3e12);
    expect(gridOf(Float64Array.of(9), 1)).toBe(1);
  });

  it("keeps pauses that no edge number could hold", () => {
    const block = digital([0, 1, 2 ** 52, 2 ** 53 - 1], [3, 1, 3, 1]);
    expect(decodeBlock(encodeBlock(block, 1), 4, false, 1)).toEqual(block);
  });

  it("keeps voltages to a 32767th of the largest, leads to a step, and what is unknown unknown", () => {
    const value = fc.oneof(fc.double({ min: -1, max: 5.5, noNaN: true }), fc.constant(Number.NaN));
    fc.assert(
      fc.property(
        edges,
        fc.array(value, { minLength: 4, maxLength: 30 }),
        fc.integer({ min: 1, max: 400 }),
        (block, values, leadStep) => {
          const pick = (i: number) => values[i % values.length];
          const last = (i: number) => (i === 0 ? 31 ^ block.lines[0] : block.lines[i - 1] & ~CUT);
          const lead = (line: number) =>
            Float32Array.from({ length: block.length }, (_, i) =>
              (last(i) ^ block.lines[i]) & (line * 5) || i === 0 ? Math.abs(pick(i + line)) * 1000 : 0,
            );
          const volts = {
            leadScl: lead(SCL),
            leadSda: lead(SDA),
            meanScl: Float32Array.from({ length: block.length }, (_, i) => pick(i)),
            meanSda: Float32Array.from({ length: block.length }, (_, i) => pick(3 * i + 1)),
          };
          const back = decodeBlock(encodeBlock({ ...block, volts }, leadStep), block.length, true, leadStep);
          const largest = Math.max(...values.map((v) => (Number.isNaN(v) ? 0 : Math.abs(v))));
          for (let i = 0; i < block.length; i++) {
            for (const [name, within] of [
              ["leadScl", leadStep / 2 + 0.01],
              ["leadSda", leadStep / 2 + 0.01],
              ["meanScl", largest / 32_767],
              ["meanSda", largest / 32_767],
            ] as const) {
              const was = volts[name][i];
              const is = back.volts?.[name][i] ?? 0;
              if (Number.isNaN(was)) expect(is).toBeNaN();
              else expect(Math.abs(is - was)).toBeLessThanOrEqual(within);
            }
          }
        },
      ),
    );
  });
});

describe("a whole archive", () => {
  it("gives back head, edges, taps and tail", async () => {
    await fc.assert(
      fc.asyncProperty(edges, edges, fc.integer({ min: 1, max: 500 }), async (bus, tap, chunk) => {
        const bytes = await packed(HEAD, [bus], [tap]);
        expect(isArchive(bytes)).toBe(true);
        const opened = await openArchive(sourceOf(bytes, [chunk]), host);
        if (!opened.ok) throw new Error(opened.problem.message);
        expect(opened.value.head).toEqual(HEAD);
        const found: EdgeBlock[][] = [[], []];
        let progress = 0;
        const tail = await opened.value.read({
          edges: (block) => found[0].push(block),
          tap: (_, block) => found[1].push(block),
          progress: (at) => {
            progress = at;
          },
        });
        expect(tail).toEqual({ ok: true, value: TAIL });
        expect(found).toEqual([[bus], [tap]]);
        expect(progress).toBeGreaterThan(0);
      }),
      { numRuns: 40 },
    );
  });

  it("opens through the same path as the file it was made from", async () => {
    const { changes, end } = changesOf(Array.from({ length: 60 }, (_, i) => write(i + 8, i, 255 - i)).flat(), 300);
    const opened = await openVcd(sourceOf(vcdOf(changes, end)), {}, false);
    if (!opened.ok) throw new Error(opened.problem.message);
    const file = await readOut(opened.value);
    const writer = createArchiveWriter(opened.value.head, host.deflate);
    for (const block of file.blocks) writer.edges(block);
    const bytes = new Uint8Array(await new Blob(await writer.finish(file.tail)).arrayBuffer());
    const again = await openArchive(sourceOf(bytes), host);
    if (!again.ok) throw new Error(again.problem.message);
    const archive = await readOut(again.value);
    expect({ ...archive, blocks: null }).toEqual({ ...file, blocks: null });
    // Two bytes an edge would be a poor archive of edges on a grid.
    expect(bytes.length - 2500).toBeLessThan(2 * file.edges.length);
  });

  it("keeps the voltages of a capture in volts", async () => {
    const { changes, end } = changesOf([...write(0x50, 1, 2), ...write(0x21, 3)], 300_000);
    const step = (line: "scl" | "sda", level: 0 | 1) => {
      const code = line === "scl" ? "!" : '"';
      // A rise through the thresholds in three steps, a low that tells who drives.
      return level ? `r1.2 ${code}\n#__\nr3.3 ${code}` : `r${line === "scl" ? 0.12 : 0.31} ${code}`;
    };
    const header = '$timescale 1 ps $end $var real 1 ! scl $end $var real 1 " sda $end $enddefinitions $end';
    let rise = 0;
    const text = vcdOf(changes, end, { header, change: step, initial: 'r3.3 !\nr3.3 "' }).replace(
      /#(\d+)\n([^#]*)#__/g,
      (_, tick, before) => {
        rise++;
        return `#${tick}\n${before}#${Number(tick) + 90_000 + rise}`;
      },
    );
    const opened = await openVcd(sourceOf(text), { scl: "scl", sda: "sda" }, false);
    if (!opened.ok) throw new Error(opened.problem.message);
    const file = await readOut(opened.value);
    expect(file.said).toBe("S A0 A 01 A 02 A P S 42 A 03 A P");
    const writer = createArchiveWriter(opened.value.head, host.deflate);
    for (const block of file.blocks) writer.edges(block);
    const again = await openArchive(sourceOf(new Uint8Array(await new Blob(await writer.finish(file.tail)).arrayBuffer())), host);
    if (!again.ok) throw new Error(again.problem.message);
    const archive = await readOut(again.value);
    expect(archive.said).toBe(file.said);
    const column = (out: typeof file, name: "leadScl" | "leadSda" | "meanScl" | "meanSda") =>
      out.blocks.flatMap(({ volts }) => Array.from(volts?.[name] ?? []));
    expect(column(archive, "leadScl")).toEqual(column(file, "leadScl"));
    expect(column(archive, "leadSda")).toEqual(column(file, "leadSda"));
    expect(column(file, "leadScl").filter((lead) => lead > 90_000).length).toBeGreaterThan(40);
    column(archive, "meanSda").forEach((mean, i) => {
      const was = column(file, "meanSda")[i];
      if (!Number.isNaN(was)) expect(mean).toBeCloseTo(was, 3);
    });
  });

  it("cuts a long capture into blocks, the first of them small", async () => {
    const length = 1_300_000;
    const whole = digital(
      Array.from({ length }, (_, i) => i * 10 + (i % 3)),
      Array.from({ length }, (_, i) => [3, 1, 0, 2][i % 4]),
    );
    const opened = await openArchive(sourceOf(await packed({ ...HEAD, taps: [] }, [whole]), [1 << 20]), host);
    if (!opened.ok) throw new Error(opened.problem.message);
    const lengths: number[] = [];
    let at = 0;
    const tail = await opened.value.read({
      edges: (block) => {
        lengths.push(block.length);
        expect(block.ticks[block.length - 1]).toBe(whole.ticks[at + block.length - 1]);
        at += block.length;
      },
      tap: () => undefined,
      progress: () => undefined,
    });
    expect(tail.ok).toBe(true);
    expect(lengths).toEqual([65_536, 1_048_576, length - 65_536 - 1_048_576]);
  });

  it("lets a listener stop the reading", async () => {
    const opened = await openArchive(sourceOf(await packed(HEAD, [digital([1, 2], [3, 1])])), host);
    if (!opened.ok) throw new Error(opened.problem.message);
    const stop = opened.value.read({
      edges: () => {
        throw new DOMException("stopped", "AbortError");
      },
      tap: () => undefined,
      progress: () => undefined,
    });
    await expect(stop).rejects.toThrow("stopped");
  });
});

describe("damaged archives are refused", () => {
  const block = digital([10, 20, 40, 50], [3, 1, 0, 2]);
  const problem = async (bytes: Uint8Array) => {
    const opened = await openArchive(sourceOf(bytes, [64], "case.edges"), host);
    if (!opened.ok) return opened.problem;
    const tail = await opened.value.read({ edges: () => undefined, tap: () => undefined, progress: () => undefined });
    return tail.ok ? null : tail.problem;
  };

  it("cut anywhere", async () => {
    const bytes = await packed(HEAD, [block]);
    for (let length = 0; length < bytes.length; length += 3) {
      expect((await problem(bytes.subarray(0, length)))?.code, `cut at ${length}`).toBe("archive-truncated");
    }
    expect((await problem(bytes.subarray(0, 30)))?.message).toBe("The edge archive case.edges ends early, at byte 30.");
  });

  it("with any byte changed: refused, or no different (a byte of gzip's own header that nothing reads)", async () => {
    const bytes = await packed(HEAD, [block]);
    let refused = 0;
    for (let at = 0; at < bytes.length; at++) {
      const other = bytes.slice();
      other[at] ^= 0x55;
      const found = await problem(other);
      if (found) {
        refused++;
        expect(found.code).toMatch(/^archive-(corrupt|truncated|version)$/);
        expect(found.advice).not.toBe("");
      }
    }
    expect(refused).toBeGreaterThan(0.9 * bytes.length);
  });

  it("of another version, or no archive at all", async () => {
    const bytes = await packed(HEAD, [block]);
    bytes[6] = 9;
    expect(await problem(bytes)).toMatchObject({
      code: "archive-version",
      message: "The edge archive case.edges is of version 9, which this program does not know; it knows version 1.",
    });
    expect(await problem(new TextEncoder().encode("Time,SCL,SDA\n0,1,1\n"))).toMatchObject({ code: "archive-corrupt" });
  });

  it("with a head that is none", async () => {
    const bytes = await packed({ ...HEAD, timebase: { ticksPerSecond: -1, origin: "file" } }, [block]);
    expect(await problem(bytes)).toMatchObject({ code: "archive-corrupt" });
  });
});
