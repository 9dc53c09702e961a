import { expect, test } from "vitest";
import { advisePullUp, driveOf, largestPullUp, RISE_PER_RC, smallestPullUp, timeConstant } from "@/lib/limits/pullup";

test("TI SLVA689 section 4: Fast-mode, 200 pF, 3.3 V gives 966.667 ohm to 1.77 kohm", () => {
  const advice = advisePullUp({
    profile: "Fast-mode",
    vdd: 3.3,
    riseLimitS: 300e-9,
    capacitanceF: 200e-12,
    pullUpOhm: null,
    measuredRiseS: null,
  });
  expect(advice.rpMin_ohm).toBeCloseTo(966.667, 3);
  expect(advice.rpMax_ohm ?? 0).toBeCloseTo(1770, -1);
  expect(advice.passive).toBe(true);
});

test("UM10204 7.2.4: 5 V + 10 %, 0.4 V, 3 mA gives 1.7 kohm, which holds 300 ns up to about 200 pF", () => {
  expect(smallestPullUp(5.5, 0.4, 0.003)).toBeCloseTo(1700, 6);
  expect(largestPullUp(300e-9, 208e-12)).toBeCloseTo(1700, -1);
});

// Derived from UM10204 7.1 equations 1 and 2 (REFERENCE 3).
test.each([
  [1000e-9, 400e-12, 2950],
  [300e-9, 100e-12, 3541],
  [300e-9, 50e-12, 7081],
  [120e-9, 550e-12, 257],
  [120e-9, 100e-12, 1416],
])("Rp(max) for %d s on %d F is %d ohm", (rise, capacitance, ohm) => {
  expect(Math.abs(largestPullUp(rise, capacitance) - ohm)).toBeLessThan(1);
});

test.each([
  ["Fast-mode", 5.0, 1533],
  ["Fast-mode", 3.3, 967],
  ["Fast-mode", 2.5, 700],
  ["Fast-mode Plus", 5.0, 230],
  ["Fast-mode Plus", 3.3, 145],
  ["Fast-mode", 1.8, 720],
])("Rp(min) of %s at %d V is %d ohm", (profile, vdd, ohm) => {
  const { lowV, sinkA } = driveOf(profile, vdd);
  expect(Math.round(smallestPullUp(vdd, lowV, sinkA))).toBe(ohm);
});

test("Fast-mode at 3.3 V with 400 pF has no passive solution (UM10204 5.1)", () => {
  const advice = advisePullUp({
    profile: "Fast-mode",
    vdd: 3.3,
    riseLimitS: 300e-9,
    capacitanceF: 400e-12,
    pullUpOhm: null,
    measuredRiseS: null,
  });
  expect(advice.passive).toBe(false);
});

test("the RC relation: 30 % to 70 % takes 0.8473 RC, and a known pull-up gives the capacitance back", () => {
  expect(RISE_PER_RC).toBeCloseTo(0.8472979, 6);
  expect(timeConstant(RISE_PER_RC * 470e-9)).toBeCloseTo(470e-9, 15);
  const rise = RISE_PER_RC * 4700 * 150e-12;
  const advice = advisePullUp({
    profile: "Standard-mode",
    vdd: 3.3,
    riseLimitS: 1e-6,
    capacitanceF: null,
    pullUpOhm: 4700,
    measuredRiseS: rise,
  });
  expect(advice.capacitance_f ?? 0).toBeCloseTo(150e-12, 15);
});
