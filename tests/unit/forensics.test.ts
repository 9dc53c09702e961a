import { describe, expect, test } from "vitest";
import { corpusTrial, type Trial } from "@/fixtures/calibration/corpus";
import { concludeTrial } from "@/fixtures/calibration/trial";
import { controller, scenario, target } from "@/lib/simulation/plan";
import { createRandom } from "@/lib/simulation/random";
import type { ControllerPlan, Habit, Job, Segment, StretchRule } from "@/lib/simulation/scenario";
import { read, write } from "@/lib/simulation/script";

const PUMP: Partial<Habit> = { tlow_s: 5.0e-6, thigh_s: 4.7e-6, jitter_s: 5e-9 };
const GATEWAY: Partial<Habit> = {
  tlow_s: 5.7e-6,
  thigh_s: 4.3e-6,
  hdsta_s: 4.0e-6,
  dataFall_s: 0.9e-6,
  dataRise_s: 1.0e-6,
  jitter_s: 8e-9,
};

interface Setting {
  readonly contests: number;
  readonly taps?: readonly number[];
  readonly gateway?: Partial<Habit>;
  readonly plan?: Partial<ControllerPlan>;
  readonly stretch?: readonly StretchRule[];
  readonly volts?: boolean;
  readonly rate_hz?: number;
  readonly clash?: readonly [Segment[], Segment[]];
}

const job = (at_s: number, message: Segment[]): Job => ({ at_s, message, resetAfter: null });

/** Sixty messages of two controllers to three targets; in `contests` of them both start at once. */
function trial(setting: Setting): Trial {
  const random = createRandom(5);
  const jobs: Job[][] = [[], []];
  for (let i = 0; i < 60; i++) {
    const at = 1e-3 + i * 2e-3;
    const byte = random.int(0, 255);
    if (i % 2 === 0 || i >= 2 * setting.contests)
      jobs[i % 2].push(job(at, i % 3 === 0 ? [write(0x48, [1]), read(0x48, 2)] : [write(0x20, [2, byte])]));
    if (i % 2 === 1 && i < 2 * setting.contests) {
      const [a, b] = setting.clash ?? [[write(0x20, [0x02, 0x10])], [write(0x20, [0x02, 0x18])]];
      jobs[0].push(job(at, a));
      jobs[1].push(job(at + 0.5e-6, b));
    }
  }
  return {
    seed: 1,
    scenario: scenario(11, 0.125, {
      controllers: [
        controller("pump", PUMP, { jobs: jobs[0] }),
        controller("gateway", { ...GATEWAY, ...setting.gateway }, { jobs: jobs[1], drive_ohm: 130, ...setting.plan }),
      ],
      targets: [target("level", 0x48), target("valves", 0x20, { stretch: setting.stretch ?? [] })],
    }),
    instrument: { rate_hz: setting.rate_hz ?? 20e6, phase_s: 0, threshold: 0.5 },
    scope: setting.volts ? { rate_hz: 20e6, noise_v: 0.01, step_v: 3.3 / 256 } : null,
    taps: setting.taps ?? [],
    contested: setting.contests > 0,
  };
}

describe("forensics on simulated buses", () => {
  test("two controllers are found without being told, and every transaction is given to the right one", () => {
    const { outcome, recording } = concludeTrial(trial({ contests: 0 }));
    expect(outcome.controllers).toHaveLength(2);
    expect(outcome.contests).toEqual([]);
    const truth = recording.truth.transactions.map((t) => t.controllers[0]);
    const first = truth[0];
    expect([...outcome.attribution]).toEqual(truth.map((c) => (c === first ? 0 : 1)));
    // Input filter and rise time add to what a controller counts: 0.1 us here.
    expect(outcome.controllers[0].tlow_s).toBeCloseTo(5.1e-6, 7);
  });

  test.each([
    ["leaves at once", "leave"],
    ["clocks to the eighth pulse", "byte"],
    ["clocks through the ninth", "byte-ack"],
  ] as const)("a contest in data: bit, parties and retry, where the loser %s", (_, afterLoss) => {
    const { outcome, recording } = concludeTrial(trial({ contests: 5, plan: { afterLoss } }));
    expect(outcome.contests).toHaveLength(5);
    for (const [i, contest] of outcome.contests.entries()) {
      const loss = recording.truth.yields[i];
      expect(contest).toMatchObject({ transaction: loss.transaction, bit_index: 9 + 9 + 4, byte: 2, bit: 4, retry: loss.retry });
      expect(contest.kept).toBe("C1");
      expect(contest.yielded).toBe("C2");
      expect(contest.probability).toBeGreaterThan(0.95);
      expect(Math.abs(contest.decided_s - loss.decided_s)).toBeLessThan(0.2e-6);
      expect(contest.evidence.map((e) => e.kind)).toContain("clock-sync");
    }
  });

  test("one steady clock whose bit is a whole number of samples is one controller, however its messages are rounded", () => {
    // 5.0 and 4.7 us, and 0.14 us for filter and edges: 9.84 us, 12 samples. A message reads 6 and 6 throughout, or 7 and 5.
    const steady = trial({ contests: 0, rate_hz: 12 / 9.84e-6 });
    const [pump] = steady.scenario.controllers;
    const controllers = [{ ...pump, habit: { ...pump.habit, jitter_s: 0.2e-9 } }];
    const { outcome } = concludeTrial({ ...steady, scenario: { ...steady.scenario, controllers } });
    expect(outcome.controllers).toHaveLength(1);
    expect(outcome.contests).toEqual([]);
  });

  test("beside a loser with a tap one without is found too", () => {
    const two = trial({ contests: 8, taps: [0, 1] });
    const third = controller(
      "display",
      { ...PUMP, tlow_s: 6.3e-6, thigh_s: 3.9e-6, hdsta_s: 3.6e-6 },
      {
        jobs: Array.from({ length: 30 }, (_, i): Job => {
          const contested = i % 2 === 1 && i < 16;
          return job(1e-3 + i * 2e-3 + (contested ? 0.3e-6 : 1e-3), [write(0x20, [0x02, 0x1c])]);
        }),
      },
    );
    const scene = { ...two.scenario, controllers: [...two.scenario.controllers, third] };
    const { outcome, recording } = concludeTrial({ ...two, scenario: scene });
    const losses = recording.truth.yields.filter((y) => !y.alone);
    expect(losses.filter((y) => y.controller === 2).length).toBeGreaterThan(5);
    const told = outcome.contests.filter((c) => c.probability >= 0.5).map((c) => [c.transaction, c.bit_index]);
    expect(told.sort()).toEqual(losses.map((y) => [y.transaction, y.bit_index]).sort());
  });

  test("contests in the R/W bit and in the acknowledge of a read", () => {
    const rw = concludeTrial(trial({ contests: 4, clash: [[write(0x48, [7])], [read(0x48, 2)]] }));
    expect(rw.outcome.contests.map((c) => c.bit_index)).toEqual([7, 7, 7, 7]);
    const ack = concludeTrial(trial({ contests: 4, clash: [[read(0x48, 3)], [read(0x48, 2)]] }));
    expect(ack.outcome.contests.map((c) => c.bit_index)).toEqual([26, 26, 26, 26]);
  });

  test("a stretching target makes no contest, and every stretch is reported as the target's", () => {
    const stretch = [{ where: "after-ack" as const, bit: 0, byte: null, hold_s: [15e-6, 40e-6] as const, chance: 1 }];
    const { outcome, recording } = concludeTrial(trial({ contests: 0, stretch }));
    expect(outcome.contests).toEqual([]);
    // A hold before the STOP precedes no bit.
    const truth = recording.truth.stretches.filter((s) => s.pulse < recording.truth.transactions[s.transaction].pulses);
    expect(outcome.stretches.map((s) => [s.transaction, 9 * s.byte + s.bit])).toEqual(truth.map((s) => [s.transaction, s.pulse]));
    expect(new Set(outcome.stretches.map((s) => s.by))).toEqual(new Set(["target"]));
    outcome.stretches.forEach((s, i) => {
      expect(Math.abs(s.low_s - truth[i].hold_s)).toBeLessThan(0.3e-6);
    });
  });

  test.each([
    ["both", [0, 1]],
    ["the loser only", [1]],
    ["the winner only", [0]],
  ] as const)("drive taps on %s: all contests, exactly", (_, taps) => {
    const { outcome, recording } = concludeTrial(trial({ contests: 6, taps }));
    expect(outcome.contests.map((c) => [c.transaction, c.bit_index])).toEqual(
      recording.truth.yields.map((y) => [y.transaction, y.bit_index]),
    );
    expect(new Set(outcome.contests.map((c) => c.grade))).toEqual(new Set(["certain"]));
    for (const contest of outcome.contests) expect(contest.kept).not.toBe(contest.yielded);
  });

  test("volts: the deeper low of two drivers is evidence", () => {
    const { outcome, recording } = concludeTrial(trial({ contests: 5, volts: true }));
    expect(outcome.contests.map((c) => [c.transaction, c.bit_index])).toEqual(
      recording.truth.yields.map((y) => [y.transaction, y.bit_index]),
    );
    for (const contest of outcome.contests) {
      expect(contest.evidence.find((e) => e.kind === "low-level")?.bits).toBeGreaterThan(3);
    }
  });

  test("one controller polling one address, retrying after NACK, makes no contest", () => {
    const jobs = Array.from({ length: 50 }, (_, i) => job(1e-3 + i * 1.5e-3, [write(0x3d, [i % 4])]));
    const retryNack = { after_s: [1e-5, 2e-4] as const, limit: 2 };
    const alone = {
      ...trial({ contests: 0 }),
      scenario: scenario(3, 0.09, { controllers: [controller("pump", PUMP, { jobs, retryNack })], targets: [] }),
    };
    const { outcome } = concludeTrial(alone);
    expect(outcome.controllers).toHaveLength(1);
    expect(outcome.contests).toEqual([]);
  });

  test("a controller whose clock lies between two others' is none of their contests, for its low level stands above both", () => {
    // Seed 1252 of the corpus: three controllers in volts, the second of them with the longer of the others' lows, nearly, and the
    // shorter of their highs.
    const trial = corpusTrial(1252);
    const { outcome, recording } = concludeTrial(trial);
    expect(outcome.controllers).toHaveLength(3);
    const contested = new Set(recording.truth.yields.map(({ transaction }) => transaction));
    const ties = recording.truth.transactions.flatMap(({ controllers }, t) => (controllers.length > 1 ? [t] : []));
    const real = new Set([...contested, ...ties]);
    expect(outcome.contests.filter(({ transaction, probability }) => probability >= 0.5 && !real.has(transaction))).toEqual([]);
  });

  test("a pair that would leave no trace is named, from the one side only, and not where a tap would show it", () => {
    // Longer low, shorter high and hold, data that falls sooner and rises later: with the pump beside it, the lines are the gateway's own.
    const covers = { dataFall_s: 0.45e-6, dataRise_s: 1.0e-6 };
    const { outcome } = concludeTrial(trial({ contests: 0, gateway: covers }));
    const [slow, quick] = [...outcome.controllers].sort((a, b) => (b.tlow_s ?? 0) - (a.tlow_s ?? 0)).map(({ id }) => id);
    expect(outcome.blindPairs).toEqual([{ kept: slow, yielded: quick }]);
    // Here the pump's data falls first.
    expect(concludeTrial(trial({ contests: 0 })).outcome.blindPairs).toEqual([]);
    expect(concludeTrial(trial({ contests: 0, gateway: covers, taps: [0, 1] })).outcome.blindPairs).toEqual([]);
  });

  test("a controller log finds its place by the losses it reports, whatever its clock, and a flag without a contest is named", () => {
    const setting = trial({ contests: 12 });
    const plain = concludeTrial(setting);
    const clock = (time: number): number => 1234.5 + time * (1 + 80e-6);
    const { yields, transactions } = plain.recording.truth;
    const reported = yields.map((y) => ({
      time_s: clock(y.decided_s + 30e-6),
      controller: "gateway",
      message: "xfer failed: EAGAIN",
    }));
    const innocent = transactions.findIndex((t, i) => i > 40 && t.controllers.length === 1 && !yields.some((y) => y.retry === i));
    const spurious = { time_s: clock(transactions[innocent].end_s), controller: "gateway", message: "ARLO set" };
    const log = [...reported, spurious].sort((a, b) => a.time_s - b.time_s);
    const { outcome } = concludeTrial(setting, false, { roster: [], log }, plain.recording);
    expect(outcome.contests).toHaveLength(12);
    for (const contest of outcome.contests) expect(contest.evidence.find((e) => e.kind === "log")?.bits).toBeGreaterThan(3);
    expect(outcome.lookAlikes).toHaveLength(1);
    expect(outcome.lookAlikes[0]).toMatchObject({ kind: "look-alike", transaction: innocent });
    expect(outcome.lookAlikes[0].detail).toContain("Wire legal, flag set");
    // The report carries the log on the capture's clock: each line within its tolerance of where it happened.
    expect(outcome.log).toMatchObject({ aligned: true, entries: 13 });
    expect(outcome.log?.drift).toBeCloseTo(80e-6, 5);
    const happened = [...yields.map((y) => y.decided_s), transactions[innocent].end_s].sort((a, b) => a - b);
    expect(outcome.log?.lines.map((line) => line.loss)).toEqual(happened.map(() => true));
    for (const [i, line] of (outcome.log?.lines ?? []).entries())
      expect(Math.abs(line.time_s - happened[i])).toBeLessThan(outcome.log?.tolerance_s ?? 0);
    const silent = concludeTrial(setting, false, { roster: [], log: [spurious] }, plain.recording).outcome;
    expect(silent.log).toMatchObject({ aligned: false, entries: 1, lines: [] });
    expect(plain.outcome.log).toBeNull();
  });

  test("a target that goes on holding SDA after its controller was reset is a look-alike, not a contest", () => {
    const jobs: Job[] = [
      ...Array.from({ length: 20 }, (_, i) => job(1e-3 + i * 2e-3, [write(0x20, [2, i])])),
      { at_s: 45e-3, message: [read(0x48, 3)], resetAfter: 12 },
      { at_s: 48e-3, message: [], resetAfter: null },
      job(52e-3, [write(0x20, [2, 1])]),
    ];
    const held = {
      ...trial({ contests: 0 }),
      scenario: scenario(3, 0.06, {
        controllers: [controller("pump", PUMP, { jobs })],
        targets: [target("level", 0x48, { data: [0] }), target("valves", 0x20)],
      }),
    };
    const { outcome } = concludeTrial(held);
    expect(outcome.contests).toEqual([]);
    expect(outcome.lookAlikes.length).toBeGreaterThan(0);
  });

  test("an empty capture concludes to nothing", () => {
    const nothing = { ...trial({ contests: 0 }), scenario: scenario(3, 0.01, {}) };
    expect(concludeTrial(nothing).outcome).toMatchObject({ contests: [], controllers: [], stretches: [] });
  });
});
