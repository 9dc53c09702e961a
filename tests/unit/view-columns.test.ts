import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { BlockIndex } from "@/lib/view/columns";
import { EdgeColumns, LINE_BITS, levelOf } from "@/lib/view/edges";
import { fitted } from "@/lib/view/scale";
import { nearestEdge, OUTSIDE, stripColumns } from "@/lib/view/strip";
import { edgesOf, split } from "./view-support";

describe("the index of blocks", () => {
  it("finds every entry in its block, whatever the blocks' lengths", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 3000 }), { minLength: 1, maxLength: 60 }), (lengths) => {
        const index = new BlockIndex();
        for (const length of lengths) index.append(length);
        let start = 0;
        lengths.forEach((length, block) => {
          for (const at of [start, start + length - 1]) expect(index.block(at)).toBe(block);
          expect(index.start(block)).toBe(start);
          start += length;
        });
        expect(index.total).toBe(start);
      }),
    );
  });
});

/** Random traces as marks; runs of different lengths, some unknown. */
const trace = fc
  .array(fc.tuple(fc.constantFrom("#", "_", "?"), fc.integer({ min: 1, max: 9 })), { minLength: 1, maxLength: 120 })
  .map((runs) => runs.map(([mark, times]) => mark.repeat(times)).join(""));

function filled(scl: string, sda: string, most: number): EdgeColumns {
  const width = Math.min(scl.length, sda.length);
  const columns = new EdgeColumns();
  for (const block of split(edgesOf(scl.slice(0, width), sda.slice(0, width)), most)) columns.append(block);
  return columns;
}

describe("edges in columns", () => {
  it("counts changes of a line before any entry as a walk does", () => {
    fc.assert(
      fc.property(trace, trace, fc.integer({ min: 1, max: 200 }), (scl, sda, most) => {
        const columns = filled(scl, sda, most);
        for (const line of ["scl", "sda"] as const) {
          let walked = 0;
          for (let k = 0; k <= columns.length; k++) {
            expect(columns.changesBefore(line, k)).toBe(walked);
            if (k > 0 && k < columns.length && (columns.lines(k) ^ columns.lines(k - 1)) & LINE_BITS[line]) walked++;
          }
        }
      }),
    );
  });

  it("seeks the first entry at or after a tick from any earlier one", () => {
    fc.assert(
      fc.property(
        trace,
        trace,
        fc.integer({ min: 1, max: 50 }),
        fc.integer({ min: -5, max: 9000 }),
        fc.nat(),
        (scl, sda, most, tick, from) => {
          const columns = filled(scl, sda, most);
          let expected = 0;
          while (expected < columns.length && columns.tick(expected) < tick) expected++;
          expect(columns.seek(tick)).toBe(expected);
          expect(columns.seek(tick, from % (expected + 1))).toBe(expected);
        },
      ),
    );
  });

  it("finds the nearest edge within reach, and none beyond", () => {
    const columns = filled("##__####", "########", 3);
    expect(columns.tick(nearestEdge(columns, 22, 5))).toBe(20);
    expect(nearestEdge(columns, 30, 5)).toBe(-1);
  });
});

describe("the strip", () => {
  it("shows in every column what a walk over its edges shows", () => {
    fc.assert(
      fc.property(trace, trace, fc.integer({ min: 1, max: 97 }), fc.integer({ min: 1, max: 60 }), (scl, sda, most, width) => {
        const columns = filled(scl, sda, most);
        const end = Math.min(scl.length, sda.length) * 10;
        const scale = fitted({ from: 0, to: end }, width);
        const strip = stripColumns(columns, scale, { from: 0, to: end });
        for (let x = 0; x < width; x++) {
          const from = scale.origin + x * scale.ticksPerPixel;
          const to = scale.origin + (x + 1) * scale.ticksPerPixel;
          for (const line of ["scl", "sda"] as const) {
            let changes = 0;
            let level: number = levelOf(columns.lines(0), line);
            for (let k = 1; k < columns.length && columns.tick(k) < to; k++) {
              const changed = ((columns.lines(k) ^ columns.lines(k - 1)) & LINE_BITS[line]) !== 0;
              if (columns.tick(k) < from) level = levelOf(columns.lines(k), line);
              else if (changed) changes++;
            }
            expect(strip[line].changes[x]).toBe(changes);
            expect(strip[line].enter[x]).toBe(level);
          }
        }
      }),
    );
  });

  it("marks the column of a pulse of one tick in a long record", () => {
    const columns = new EdgeColumns();
    columns.append({
      length: 3,
      ticks: Float64Array.from([0, 3_600_000_000_000, 3_600_000_000_001]),
      lines: Uint8Array.from([3, 1, 3]),
      volts: null,
    });
    const record = { from: 0, to: 7_200_000_000_000 };
    const strip = stripColumns(columns, fitted(record, 1600), record);
    expect(strip.sda.changes[800]).toBe(2);
    expect([...strip.sda.changes].filter((changes) => changes > 0)).toHaveLength(1);
    expect([...strip.scl.changes].every((changes) => changes === 0)).toBe(true);
  });

  it("says where there is no record", () => {
    const columns = filled("##__##", "######", 9);
    const strip = stripColumns(columns, { origin: -100, ticksPerPixel: 10, width: 30 }, { from: 0, to: 60 });
    expect(strip.scl.enter[0]).toBe(OUTSIDE);
    expect(strip.scl.enter[13]).toBe(0);
    expect(strip.scl.enter[29]).toBe(OUTSIDE);
  });
});
