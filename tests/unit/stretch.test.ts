import { describe, expect, test } from "vitest";
import type { Trial } from "@/fixtures/calibration/corpus";
import { concludeTrial } from "@/fixtures/calibration/trial";
import { controller, scenario, target } from "@/lib/simulation/plan";
import type { Habit, Job, StretchRule } from "@/lib/simulation/scenario";
import { write } from "@/lib/simulation/script";

/** Two controllers take turns writing two bytes to two targets. */
function trial(stretch: readonly StretchRule[], habit: Partial<Habit>): Trial {
  const jobs: Job[][] = [[], []];
  for (let i = 0; i < 40; i++) {
    jobs[i % 2].push({ at_s: 1e-3 + i * 2e-3, message: [write(i % 4 < 2 ? 0x20 : 0x48, [2, i])], resetAfter: null });
  }
  return {
    seed: 2,
    scenario: scenario(4, 0.085, {
      controllers: [
        controller("pump", { jitter_s: 4e-9, ...habit }, { jobs: jobs[0] }),
        controller("gateway", { tlow_s: 5.8e-6, thigh_s: 4.2e-6, dataFall_s: 0.9e-6, jitter_s: 4e-9 }, { jobs: jobs[1] }),
      ],
      targets: [target("valves", 0x20, { stretch }), target("level", 0x48)],
    }),
    instrument: { rate_hz: 20e6, phase_s: 0, threshold: 0.5 },
    scope: null,
    taps: [],
    contested: false,
  };
}

const hold = (where: StretchRule["where"], bit = 0): StretchRule[] => [
  { where, bit, byte: null, hold_s: [25e-6, 60e-6], chance: 1 },
];

describe("clock stretching", () => {
  test.each([
    ["before the acknowledge", "ninth", 8],
    ["after the acknowledge", "after-ack", 0],
    ["inside a byte", "bit", 5],
  ] as const)("a target that stretches %s is named, with place and length", (_, where, bit) => {
    const { outcome, recording } = concludeTrial(trial(hold(where, bit), {}));
    const truth = recording.truth.stretches.filter((s) => s.pulse < recording.truth.transactions[s.transaction].pulses);
    expect(truth.length).toBeGreaterThan(30);
    expect(outcome.stretches.map((s) => [s.transaction, 9 * s.byte + s.bit])).toEqual(truth.map((s) => [s.transaction, s.pulse]));
    outcome.stretches.forEach((s, i) => {
      expect(s.by).toBe("target");
      expect(s.bit).toBe(bit);
      expect(Math.abs(s.low_s - truth[i].hold_s)).toBeLessThan(0.25e-6);
      expect(s.excess_s).toBeLessThan(s.low_s - 4.8e-6);
    });
    expect(outcome.contests).toEqual([]);
  });

  test("a controller that is late with every next byte, whoever is addressed, is not a stretching target", () => {
    const { outcome } = concludeTrial(trial([], { pause_s: 30e-6, pauseSpread_s: 15e-6 }));
    expect(outcome.stretches.length).toBeGreaterThan(20);
    expect(new Set(outcome.stretches.map((s) => s.by))).toEqual(new Set(["controller"]));
    expect(outcome.contests).toEqual([]);
  });

  test("nobody stretches: nothing is reported", () => {
    expect(concludeTrial(trial([], {})).outcome.stretches).toEqual([]);
  });
});
