import { describe, expect, it } from "vitest";
import { analyze } from "@/lib/diagnosis/analyze";
import { openVcd } from "@/lib/engine/samples/vcd";
import { type Answer, betweenTargets, meetingProbability } from "@/lib/forensics/answers";
import { simulate } from "@/lib/simulation/bus";
import { vcd } from "@/lib/simulation/files";
import { controller, scenario, target } from "@/lib/simulation/plan";
import { createRandom } from "@/lib/simulation/random";
import { read, write } from "@/lib/simulation/script";
import { sourceOf } from "../support/vcd";

const ALERT = 0x0c;

function answer(transaction: number, ...data: number[]): Answer {
  return { transaction, of: "alert", data, startTick: transaction * 1000 };
}

/** Targets of one round answer in rising order of their addresses; a read that nobody answers ends the round. */
function alertRounds(seed: number, rounds: number, share: number) {
  const random = createRandom(seed);
  const answers: Answer[] = [];
  const met: boolean[] = [];
  for (let round = 0; round < rounds; round++) {
    const first = random.int(1, 119);
    let second = random.int(1, 119);
    if (second === first) second++;
    const both = random.chance(share);
    const order = both ? [Math.min(first, second), Math.max(first, second)] : [first, second];
    met.push(both);
    for (const address of order) answers.push(answer(answers.length, address << 1));
    answers.push(answer(answers.length));
  }
  return { answers, met };
}

describe("contests between targets", () => {
  it("knows from the order alone what can be known", () => {
    // By hand: the share of pairs that met uniform, P(met, rising) = 1/2 and P(rising) = 3/4.
    expect(meetingProbability(1, 0)).toBeCloseTo(2 / 3, 3);
    expect(meetingProbability(40, 0)).toBeGreaterThan(0.97);
    // One pair each way: (1/12) / (1/6).
    expect(meetingProbability(1, 1)).toBeCloseTo(1 / 2, 3);
    expect(meetingProbability(20, 20)).toBeLessThan(meetingProbability(5, 5));
  });

  it("claims as often as it is right, whatever the share of alerts that met", () => {
    const random = createRandom(77);
    let claimed = 0;
    let right = 0;
    let claims = 0;
    for (let bus = 0; bus < 1500; bus++) {
      const { answers, met } = alertRounds(1000 + bus, random.int(1, 6), random.next());
      const found = betweenTargets(answers, 1000);
      for (const contest of found) {
        claims++;
        claimed += contest.probability;
        right += met[contest.transaction / 3] ? 1 : 0;
      }
    }
    expect(claims).toBeGreaterThan(1500);
    expect(Math.abs(claimed - right) / claims).toBeLessThan(0.03);
  });

  it("says nothing of falling order, of the same answer again, or across a read that nobody answers", () => {
    expect(betweenTargets([answer(0, 0x91), answer(1, 0x59)], 1000)).toEqual([]);
    expect(betweenTargets([answer(0, 0x59), answer(1, 0x59)], 1000)).toEqual([]);
    expect(betweenTargets([answer(0, 0x59), answer(1), answer(2, 0x91)], 1000)).toEqual([]);
  });

  it("finds the bit at which a target of a simulated bus gave up", async () => {
    const jobs = [0, 1].map((k) => ({ at_s: 1e-4 + k * 1e-3, message: [read(ALERT, 1)], resetAfter: null }));
    const recording = simulate(
      scenario(3, 3e-3, {
        controllers: [controller("pump", {}, { jobs })],
        // The first answers once with its address, 0x2C, and leaves the line alone after that; the other is 0x48.
        targets: [
          target("oxygen", ALERT, { arbitrates: true, data: [0x59, 0xff] }),
          target("level", ALERT, { arbitrates: true, data: [0x91] }),
        ],
      }),
    );
    const { target_contests: found } = await summaryOf(vcd(recording, { rate_hz: null, phase_s: 0, threshold: 0.5 }, []));
    // 0x59 = 0101 1001 against 0x91 = 1001 0001: the very first data bit.
    expect(found).toHaveLength(1);
    expect(found?.[0]).toMatchObject({ transaction: 0, byte: 1, bit: 0, bit_index: 9, kept: 0x2c, yielded: 0x48, retry: 1 });
    expect(found?.[0].grade).toBe("probable");
  });

  it("knows ARP's Get UDID by the command before it", async () => {
    const udid = (last: number) => [17, ...Array.from({ length: 15 }, (_, k) => k), last];
    const ask = (command: number, at_s: number) => ({
      at_s,
      message: [write(0x61, [command]), read(0x61, 17)],
      resetAfter: null,
    });
    const bus = (command: number) =>
      simulate(
        scenario(3, 1.2e-2, {
          controllers: [controller("pump", {}, { jobs: [ask(command, 1e-4), ask(command, 5e-3)] })],
          targets: [target("level", 0x61, { data: [...udid(0x41), ...udid(0x49)] })],
        }),
      );
    const looked = { rate_hz: null, phase_s: 0, threshold: 0.5 };
    const { target_contests: found } = await summaryOf(vcd(bus(0x03), looked, []));
    expect(found?.[0]).toMatchObject({ byte: 17, bit: 4, kept: null, yielded: null });
    expect((await summaryOf(vcd(bus(0x07), looked, []))).target_contests).toEqual([]);
  });
});

async function summaryOf(bytes: Uint8Array) {
  const opened = await openVcd(sourceOf(bytes), {}, false);
  if (!opened.ok) throw new Error(opened.problem.message);
  const ignore = () => undefined;
  const listener = { head: ignore, edges: ignore, tap: ignore, transactions: ignore, progress: ignore };
  const outcome = await analyze(opened.value, { read: {}, limits: null, cb_pf: null, roster: [], log: [] }, listener);
  if (!outcome.ok) throw new Error(outcome.problem.message);
  return outcome.summary;
}
