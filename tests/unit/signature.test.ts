import { describe, expect, test } from "vitest";
import { brokenDensity, Chain } from "@/lib/forensics/chain";
import { larger, phi, smaller } from "@/lib/forensics/normal";
import { beat, runSpread } from "@/lib/forensics/period";
import { parallel } from "@/lib/forensics/together";
import { createRandom } from "@/lib/simulation/random";

describe("signature arithmetic", () => {
  test("normal distribution function against its tabulated values (Abramowitz and Stegun, table 26.1; from memory)", () => {
    expect(phi(0)).toBeCloseTo(0.5, 6);
    expect(phi(1)).toBeCloseTo(0.8413447, 6);
    expect(phi(1.96)).toBeCloseTo(0.9750021, 6);
    expect(phi(-2.5)).toBeCloseTo(0.0062097, 6);
  });

  test("larger of two equal normals: mean 1/sqrt(pi), variance 1 - 1/pi (closed form)", () => {
    const unit = { mean: 0, variance: 1 };
    expect(larger(unit, unit).mean).toBeCloseTo(1 / Math.sqrt(Math.PI), 5);
    expect(larger(unit, unit).variance).toBeCloseTo(1 - 1 / Math.PI, 5);
    expect(smaller(unit, unit).mean).toBeCloseTo(-1 / Math.sqrt(Math.PI), 5);
    expect(larger({ mean: 10, variance: 1 }, unit).mean).toBeCloseTo(10, 5);
  });

  test("two drivers sink lower than one: 100 ohm beside none gives 0.036 V (REFERENCE 7: VDD 3.3 V, 2.2 kohm, Ron 30 ohm)", () => {
    const level = (ohm: number) => ({ mean: (3.3 * ohm) / (2200 + ohm), variance: 1e-6, count: 10 });
    expect(level(130).mean).toBeCloseTo(0.184, 3);
    expect(level(30).mean).toBeCloseTo(0.044, 3);
    expect(parallel(level(130), level(30), 3.3)?.mean).toBeCloseTo(0.036, 3);
    expect(parallel(null, level(30), 3.3)).toBeNull();
  });

  test("the density of a broken interval is one: numerically integrated up to a thousand times the habit", () => {
    let area = 0;
    for (let x = 1e-3, next = 0; x < 1000; x = next) {
      next = x * 1.0005;
      area += brokenDensity((x + next) / 2, 1) * (next - x);
    }
    // Half of each side is taken from a two-sided exponential, so the mass lies between a half and one.
    expect(area).toBeGreaterThan(0.5);
    expect(area).toBeLessThanOrEqual(1.001);
  });

  test("the clock filter prefers the clock that keeps the phase, though no single interval tells them apart", () => {
    const step = 100;
    const period = 503;
    const ticks = Array.from({ length: 40 }, (_, i) => Math.ceil((17 + i * period) / step) * step);
    const score = (mean: number): number => {
      const chain = new Chain((step * step) / 12);
      return ticks.slice(1).reduce((sum, tick, i) => sum + chain.step(tick - ticks[i], mean, 9, 0.01), 0);
    };
    expect(score(503)).toBeGreaterThan(score(490) + 10);
    expect(score(503)).toBeGreaterThan(score(516) + 10);
  });

  test("sampling error averages out unless the bit time is nearly whole samples", () => {
    expect(beat(100, 20, 0)).toBeGreaterThan(0.08);
    expect(beat(100.37, 20, 0)).toBeLessThan(0.01);
    expect(beat(100, 20, 0.5)).toBeLessThan(0.01);
  });

  test("a clock's jitter is found under coarse rounding, and none is found where there is none", () => {
    const step = 100;
    const found = (jitter: number, period: number): number => {
      const random = createRandom(3);
      const spread = runSpread({ step, variance: step ** 2 / 12 });
      for (let m = 0; m < 400; m++) {
        const run = (): number => {
          const from = random.range(0, step);
          const to = from + 7 * period + Math.sqrt(7) * jitter * random.gauss();
          return (Math.ceil(to / step) - Math.ceil(from / step)) * step;
        };
        spread.add([run(), run()]);
      }
      return Math.sqrt(spread.variance(period));
    };
    // Seven periods of 1007 end on half a step, where rounding is at its worst. The estimate has its own standard error on top.
    for (const period of [1000, 1003, 1007]) {
      expect(found(0, period)).toBeLessThan(0.12 * step);
      expect(found(30, period)).toBeGreaterThan(26);
      expect(found(30, period)).toBeLessThan(36);
    }
  });
});
