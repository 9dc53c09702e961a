import { describe, expect, it } from "vitest";
import type { Contest, Stretch } from "@/lib/diagnosis/report";
import { type Marks, marksOf, NO_MARKS } from "@/lib/view/marks";
import { bracePath, linePath } from "@/lib/view/path";
import { rowScene } from "@/lib/view/row";
import { rowSentence, verdicts } from "@/lib/view/words";
import { edgesOf, message, readEdges, split } from "./view-support";

const WRITE: readonly (readonly [number, 0 | 1])[] = [
  [0xa0, 1],
  [0x01, 1],
  [0x1f, 0],
];

function read(bytes = WRITE, most = 1000) {
  const { scl, sda } = message(bytes);
  return readEdges(split(edgesOf(scl, sda), most), scl.length * 10);
}

const UNJUDGED: Marks = marksOf(null);

describe("the scene of a row", () => {
  const source = read();
  const row = source.ledger.row(0);
  const scene = rowScene(source, row, NO_MARKS, null);

  it("has one pulse for every bit, each rising inside its low and falling after", () => {
    expect(scene.pulses.slice(0, 27)).toHaveLength(27);
    for (const pulse of scene.pulses.slice(0, 27)) {
      expect(pulse.low).toBeLessThan(pulse.rise);
      expect(pulse.rise).toBeLessThan(pulse.fall);
    }
  });

  it("braces eight bits with their value and sets the ninth apart", () => {
    expect(scene.braces.map((brace) => brace.text)).toEqual(["A0", "01", "1F"]);
    expect(scene.braces.map((brace) => brace.broken)).toEqual([false, false, false]);
    for (const [place, brace] of scene.braces.entries()) {
      expect(brace.from).toBe(scene.pulses[place * 9].rise);
      expect(brace.to).toBe(scene.pulses[place * 9 + 7].fall);
    }
    expect(scene.letters.filter((letter) => letter.kind !== "condition").map((letter) => letter.text)).toEqual(["A", "A", "N"]);
  });

  it("sets S at 0 and P at its end", () => {
    const conditions = scene.letters.filter((letter) => letter.kind === "condition");
    expect(conditions.map((letter) => [letter.text, letter.at])).toEqual([
      ["S", 0],
      ["P", scene.span],
    ]);
  });

  it("is the same however the edges were cut into blocks", () => {
    for (const most of [1, 7, 64]) {
      const other = read(WRITE, most);
      expect(rowScene(other, other.ledger.row(0), NO_MARKS, null)).toEqual(scene);
    }
  });

  it("calls the last NACK of a read expected and an unanswered address not", () => {
    const reading = read([
      [0xa1, 1],
      [0x3c, 0],
    ]);
    const kinds = (source_: typeof reading) =>
      rowScene(source_, source_.ledger.row(0), NO_MARKS, null)
        .letters.filter((letter) => letter.kind !== "condition")
        .map((letter) => letter.kind);
    expect(kinds(reading)).toEqual(["ack", "expected-nack"]);
    expect(kinds(read([[0x7a, 0]]))).toEqual(["nack"]);
  });

  it("hatches the deciding bit in the contested row and in its retry", () => {
    const contest = { transaction: 0, bit_index: 20, retry: 1 } as Contest;
    const own = rowScene(source, row, { ...NO_MARKS, contest }, null);
    const retry = rowScene(source, row, NO_MARKS, { ...NO_MARKS, contest });
    const pulse = scene.pulses[20];
    expect(own.hatches).toEqual([{ from: pulse.low, to: pulse.fall, side: "contest" }]);
    expect(retry.hatches).toEqual([{ from: pulse.low, to: pulse.fall, side: "retry" }]);
  });

  it("dimensions a stretch from where SCL fell to where it rose", () => {
    const start_s = (row.startTick + 200) / source.ticksPerSecond;
    const stretch: Stretch = { transaction: 0, byte: 1, bit: 0, start_s, low_s: 2e-6, excess_s: 1.5e-6, by: "target" };
    const [dimension] = rowScene(source, row, { ...NO_MARKS, stretches: [stretch] }, null).dimensions;
    expect(dimension.from).toBeCloseTo(200, 6);
    expect(dimension.to).toBeCloseTo(400, 6);
    expect(dimension.text).toBe("2.00\u00a0µs low, habit 500\u00a0ns, by target");
  });
});

describe("what is said of a row", () => {
  const source = read();
  const row = source.ledger.row(0);

  it("says nothing about limits that were not judged", () => {
    expect(verdicts(row, NO_MARKS, UNJUDGED)).toEqual([]);
    expect(verdicts(row, NO_MARKS, { ...UNJUDGED, judged: true, complete: true }).map((verdict) => verdict.text)).toEqual([
      "within limits",
    ]);
  });

  it("reads the row out in one sentence", () => {
    const words = verdicts(row, { ...NO_MARKS, contest: { bit_index: 20 } as Contest }, UNJUDGED);
    expect(rowSentence(source.ledger, row, words, "feed log")).toBe(
      "Transaction 0, address 0x50, feed log, write; data 01 1F not acknowledged; ends with STOP; contest, bit 20",
    );
  });
});

describe("paths", () => {
  const frame = { scale: 1, shift: 0, left: 0, right: 100, high: 0, low: 10 };

  it("draws levels and the strokes between them", () => {
    expect(linePath({ before: 1, at: [20, 50], levels: [0, 1] }, frame).path).toBe("M0 0H20V10H50V0H100");
  });

  it("still draws a pulse that is far narrower than a pixel", () => {
    const { path } = linePath({ before: 1, at: [20_000, 20_001], levels: [0, 1] }, { ...frame, scale: 1 / 1000 });
    expect(path).toBe("M0 0H20V10V0H100");
  });

  it("has no more parts than pixels, however many changes", () => {
    const at = Array.from({ length: 100_000 }, (_, k) => k);
    const levels = at.map((k) => (k % 2 === 0 ? (0 as const) : (1 as const)));
    const { path } = linePath({ before: 1, at, levels }, { ...frame, scale: 100 / 100_000 });
    expect(path.split("V").length).toBeLessThan(500);
  });

  it("draws no line where the level is unknown", () => {
    const drawn = linePath({ before: 1, at: [20, 50], levels: [2, 0] }, frame);
    expect(drawn.path).toBe("M0 0H20M50 10H100");
    expect(drawn.unknown).toBe("M20 0H50M20 10H50");
  });

  it("begins in the middle of a long row with the level that holds there", () => {
    expect(linePath({ before: 1, at: [20, 250], levels: [0, 1] }, { ...frame, shift: -200 }).path).toBe("M0 10H50V0H100");
  });

  it("keeps a brace inside its ends", () => {
    const numbers = [...bracePath(10, 60, 5, 7).matchAll(/-?[\d.]+/g)].map(Number);
    expect(Math.min(...numbers)).toBeGreaterThanOrEqual(5);
    expect(Math.max(...numbers)).toBeLessThanOrEqual(60);
  });
});
