import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { axisMarks, endOf, fitted, kept, panned, roundStep, scaleBar, tickAt, xOf, zoomed } from "@/lib/view/scale";
import { moved, revealing, rowSpan, settled, TRACK, trackHeight } from "@/lib/view/window";

const MILLIONS = { rows: 2_000_000, rowHeight: 93, view: 900 };

describe("the window on a long list", () => {
  it("keeps the track below what browsers can hold", () => {
    expect(trackHeight(MILLIONS)).toBe(TRACK);
    expect(trackHeight({ ...MILLIONS, rows: 10 })).toBe(930);
  });

  it("moves pixel for pixel over near distances", () => {
    const from = settled(MILLIONS, 50_000_000);
    const to = moved(MILLIONS, from, from.top + 120);
    expect(to.offset).toBeCloseTo(from.offset + 120, 6);
  });

  it("reaches the first and the last row from anywhere", () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 185_999_100 }), (offset) => {
        const from = settled(MILLIONS, offset);
        const end = moved(MILLIONS, from, trackHeight(MILLIONS) - MILLIONS.view);
        expect(rowSpan(MILLIONS, end, 0).end).toBe(MILLIONS.rows);
        expect(rowSpan(MILLIONS, moved(MILLIONS, from, 0), 0).first).toBe(0);
      }),
    );
  });

  it("scales a jump along the scrollbar", () => {
    const half = moved(MILLIONS, { offset: 0, top: 0 }, (TRACK - 900) / 2);
    expect(half.offset).toBeCloseTo((MILLIONS.rows * MILLIONS.rowHeight - 900) / 2, 0);
  });

  it("draws the rows in view where they are seen", () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 185_999_100 }), fc.integer({ min: 0, max: 8 }), (offset, spare) => {
        const position = settled(MILLIONS, offset);
        const span = rowSpan(MILLIONS, position, spare);
        // Screen position of the first row is the same on the track as in the unscaled list.
        expect(span.top - position.top).toBeCloseTo(span.first * MILLIONS.rowHeight - position.offset, 6);
        expect(span.end - span.first).toBeLessThanOrEqual(Math.ceil(900 / 93) + 1 + 2 * spare);
        expect(span.first * MILLIONS.rowHeight).toBeLessThanOrEqual(position.offset);
        expect(span.end * MILLIONS.rowHeight).toBeGreaterThanOrEqual(Math.min(position.offset + 900, 186_000_000));
      }),
    );
  });

  it("brings any row into view, and leaves one alone that is in view", () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 185_999_100 }), fc.integer({ min: 0, max: 1_999_999 }), (offset, row) => {
        const next = revealing(MILLIONS, offset, row, 60);
        expect(row * 93).toBeGreaterThanOrEqual(next + 60);
        expect((row + 1) * 93).toBeLessThanOrEqual(next + 900);
        expect(revealing(MILLIONS, next, row, 60)).toBe(next);
      }),
    );
  });
});

describe("the time scale", () => {
  const bounds = { from: -2_000_000, to: 8_000_000 };
  const scale = fitted(bounds, 1000);

  it("goes from tick to pixel and back", () => {
    expect(xOf(scale, bounds.to)).toBe(1000);
    expect(tickAt(scale, xOf(scale, 123_456))).toBeCloseTo(123_456, 6);
  });

  it("keeps the tick under the pointer while it zooms, and never leaves the record", () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.01, max: 100, noNaN: true }),
        fc.integer({ min: 0, max: 1000 }),
        fc.integer({ min: -5000, max: 5000 }),
        (factor, at, by) => {
          const near = zoomed(scale, 0.01, 500, bounds);
          const next = zoomed(near, factor, at, bounds);
          const moved_ = panned(next, by, bounds);
          for (const made of [next, moved_]) {
            expect(made.origin).toBeGreaterThanOrEqual(bounds.from - 1e-3);
            expect(endOf(made)).toBeLessThanOrEqual(bounds.to + 1e-3);
          }
          if (next.origin > bounds.from && endOf(next) < bounds.to - 1e-3 && next.ticksPerPixel > 0.021) {
            expect(xOf(next, tickAt(near, at))).toBeCloseTo(at, 3);
          }
        },
      ),
    );
  });

  it("is as it was when it already fits", () => {
    expect(kept(scale, bounds)).toEqual(scale);
  });

  it("takes steps of 1, 2 and 5", () => {
    expect([0.9, 1, 1.2, 2.5, 6, 11].map(roundStep)).toEqual([1, 1, 2, 5, 10, 20]);
  });

  it("labels round times far enough apart", () => {
    const marks = axisMarks(scale, { ticksPerSecond: 1e9, origin: "file" }, 120);
    expect(marks.map((mark) => mark.text.replaceAll("\u00a0", " "))).toEqual([
      "−0.002 s",
      "0.000 s",
      "0.002 s",
      "0.004 s",
      "0.006 s",
      "0.008 s",
    ]);
    for (let k = 1; k < marks.length; k++) expect(marks[k].x - marks[k - 1].x).toBeGreaterThanOrEqual(120);
  });

  it("gives a scale bar of a round length", () => {
    const bar = scaleBar(100, { ticksPerSecond: 1e9, origin: "file" }, 110);
    expect(bar.seconds).toBeCloseTo(1e-5, 12);
    expect(bar.width).toBeCloseTo(100, 6);
  });
});
