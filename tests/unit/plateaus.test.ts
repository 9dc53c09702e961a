import { expect, test } from "vitest";
import { plateausOf } from "@/lib/limits/plateaus";
import { createRandom } from "@/lib/simulation/random";

// REFERENCE 7, model of the low-level fingerprint: VDD 3.3 V, Rp 2.2 kohm, Ron 30 ohm; Rs 0, 47, 100, 200 ohm stand at 0.044, 0.112,
// 0.184 and 0.312 V.
test("drivers with different series resistors stand at plateaus of their own", () => {
  const random = createRandom(3);
  const low = (rs: number) => (3.3 * (30 + rs)) / (2200 + 30 + rs);
  const truth = [0, 47, 100, 200].map(low);
  expect(truth.map((v) => Number(v.toFixed(3)))).toEqual([0.044, 0.112, 0.184, 0.312]);
  const levels = Array.from({ length: 800 }, (_, i) => [truth[i % 4] + 0.003 * random.gauss(), 1] as const);
  const found = plateausOf(levels, 3.3);
  expect(found.map(({ count }) => count)).toEqual([200, 200, 200, 200]);
  for (const [i, { v }] of found.entries()) expect(Math.abs(v - truth[i])).toBeLessThan(0.002);
});

test("equal drivers are one plateau, a single odd low is none", () => {
  const levels = [...Array.from({ length: 500 }, (_, i) => [0.1 + 0.0001 * (i % 50), 1] as const), [0.35, 1] as const];
  expect(plateausOf(levels, 3.3)).toEqual([{ v: expect.closeTo(0.1025, 3), count: 500 }]);
  expect(plateausOf([], 3.3)).toEqual([]);
});
