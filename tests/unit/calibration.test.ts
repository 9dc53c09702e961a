import { describe, expect, test } from "vitest";
import { corpusTrial } from "@/fixtures/calibration/corpus";
import mended from "@/fixtures/calibration/corpus-1001.json";
import { type Pair, summarise } from "@/fixtures/calibration/statistics";
import { concludeTrial, score } from "@/fixtures/calibration/trial";
import { CALIBRATION } from "@/lib/forensics/calibration";

/** Seeds that the committed figures do not contain. */
const FIRST = 3001;
const COUNT = 36;

function run(): Pair[] {
  return Array.from({ length: COUNT }, (_, i) => {
    const trial = corpusTrial(FIRST + i);
    const found = concludeTrial(trial);
    const observer = concludeTrial(trial, true, undefined, found.recording);
    return { found: score(trial, found), observer: score(trial, observer), tapped: trial.taps.length > 0 };
  });
}

describe("calibration", () => {
  test("the committed figures, on buses on which nothing was mended, stand at the goals of contest inference", () => {
    expect(CALIBRATION.corpus.first).toBeGreaterThan(30_000);
    expect(CALIBRATION.ece).toBeLessThanOrEqual(0.03);
    expect(CALIBRATION.visible.found).toBeGreaterThanOrEqual(0.95);
    expect(CALIBRATION.visible.exactBit).toBeGreaterThanOrEqual(0.98);
    expect(CALIBRATION.visible.bothParties).toBeGreaterThanOrEqual(0.97);
    expect(CALIBRATION.visiblePairs.exactBit).toBeGreaterThanOrEqual(0.98);
    expect(CALIBRATION.visiblePairs.bothParties).toBeGreaterThanOrEqual(0.97);
    expect(CALIBRATION.tapped).toMatchObject({ found: 1, exactBit: 1, false: 0 });
  });

  test("on the buses on which causes were mended few are called contested that are not", () => {
    // The goal, 1, is met here and not on the others: there some captures show a controller that is not told from the rest, and then
    // much of what it sends looks contested. README.md and the help give the figures of both.
    const falseFrom = (threshold: number) => mended.roc.find((row) => row.threshold === threshold)?.falsePer2000;
    expect(mended.corpus).toEqual({ first: 1001, count: 300 });
    expect(falseFrom(0.5)).toBeLessThanOrEqual(1);
    expect(falseFrom(0.9)).toBeLessThanOrEqual(0.5);
    expect(mended.ece).toBeLessThanOrEqual(0.03);
  });

  test("a corpus not used before gives about the same", { timeout: 240_000 }, () => {
    const result = summarise(run());
    expect(result.contests).toBeGreaterThan(200);
    expect(result.ece).toBeLessThanOrEqual(0.045);
    expect(result.visiblePairs.found).toBeGreaterThanOrEqual(0.93);
    expect(result.visiblePairs.exactBit).toBeGreaterThanOrEqual(0.96);
    expect(result.visiblePairs.bothParties).toBeGreaterThanOrEqual(0.94);
    expect(result.attribution.right).toBeGreaterThanOrEqual(0.97);
    expect(result.roc.find((row) => row.threshold === 0.5)?.falsePer2000).toBeLessThanOrEqual(2);
  });
});
