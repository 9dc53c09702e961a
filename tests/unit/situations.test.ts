// Outside check: the same situations of contention on our simulated bus and in Icarus Verilog (Debian package iverilog), whose
// controllers in fixtures/simulators/situations.v were written from UM10204 3.1.1 to 3.1.10 by themselves. Every edge of both lines
// must agree, and who yielded at which pulse.

import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { SCL, SDA } from "@/lib/engine/samples/edges";
import { type Recording, simulate } from "@/lib/simulation/bus";
import { controller, scenario, target } from "@/lib/simulation/plan";
import { captureLevels } from "@/lib/simulation/sampling";
import type { AfterLoss, Habit, Segment } from "@/lib/simulation/scenario";
import { read, type Step, scriptOf, write } from "@/lib/simulation/script";
import { readVcd } from "../support/vcd";

const END_S = 4e-3;
/** Both lines follow their drivers at once, as nets in Verilog do. */
const INSTANT = { vdd_v: 3.3, pullup_ohm: 2200, sclCapacitance_f: 1e-18, sdaCapacitance_f: 1e-18, filter_s: 0 };
/** Verilog counts whole nanoseconds; a chain of at most some hundred steps stays well inside this. */
const SAME_NS = 3;

const TIMES: Habit = {
  tlow_s: 5003e-9,
  thigh_s: 4507e-9,
  hdsta_s: 4401e-9,
  susta_s: 5009e-9,
  susto_s: 4513e-9,
  buf_s: 5519e-9,
  dataFall_s: 607e-9,
  dataRise_s: 613e-9,
  sample_s: 101e-9,
  pause_s: 0,
  pauseSpread_s: 0,
  jitter_s: 0,
};

/** Clock habits of the three, so that no two do anything in the same nanosecond. */
const OWN: readonly Partial<Habit>[] = [
  {},
  { tlow_s: 5611e-9, thigh_s: 4211e-9, hdsta_s: 4211e-9, buf_s: 6043e-9, dataFall_s: 521e-9, dataRise_s: 541e-9 },
  { tlow_s: 4817e-9, thigh_s: 4909e-9, hdsta_s: 4603e-9, buf_s: 6551e-9, dataFall_s: 701e-9, dataRise_s: 709e-9 },
];

interface Player {
  readonly at_ns: number;
  readonly says: readonly Segment[];
  readonly afterLoss?: AfterLoss;
  readonly habit?: Partial<Habit>;
}

interface Situation {
  readonly players: readonly Player[];
  readonly hold_ns?: number;
  /** Who yields at which pulse of its transaction, in order. */
  readonly yields: readonly (readonly [player: number, pulse: number, meant: "bit" | "repeated-start" | "stop"])[];
}

const AT = 100_000;
const situations: Readonly<Record<string, Situation>> = {
  "address: 0x48 beats 0x4A at its sixth bit": {
    players: [
      { at_ns: AT, says: [write(0x4a, [1])] },
      { at_ns: AT + 311, says: [write(0x48, [1])] },
    ],
    yields: [[0, 5, "bit"]],
  },
  "R/W bit: a write beats a read": {
    players: [
      { at_ns: AT, says: [read(0x48, 1)] },
      { at_ns: AT + 311, says: [write(0x48, [0x21])] },
    ],
    yields: [[0, 7, "bit"]],
  },
  "data: the first 1 against a 0": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x10, 0x4c])] },
      { at_ns: AT + 311, says: [write(0x48, [0x10, 0x48])] },
    ],
    yields: [[0, 23, "bit"]],
  },
  "acknowledge of a read: whoever wants to go on keeps the bus": {
    players: [
      { at_ns: AT, says: [read(0x48, 1)] },
      { at_ns: AT + 311, says: [read(0x48, 2)] },
    ],
    yields: [[0, 17, "bit"]],
  },
  "three controllers, one leaving after the other": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x80])] },
      { at_ns: AT + 311, says: [write(0x48, [0x04])] },
      { at_ns: AT + 733, says: [write(0x48, [0x00])] },
    ],
    // The two that yielded are alone with each other in the next transaction.
    yields: [
      [0, 9, "bit"],
      [1, 14, "bit"],
      [0, 9, "bit"],
    ],
  },
  "whoever yields clocks to the eighth pulse of its byte": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x08, 0x33])] },
      { at_ns: AT + 311, says: [write(0x48, [0x40, 0x33])], afterLoss: "byte" },
    ],
    yields: [[1, 10, "bit"]],
  },
  "whoever yields clocks through the ninth pulse of its byte": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x40, 0x33])], afterLoss: "byte-ack" },
      { at_ns: AT + 311, says: [write(0x48, [0x08, 0x33])] },
    ],
    yields: [[0, 10, "bit"]],
  },
  "the same message from both: nobody yields": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x55])] },
      { at_ns: AT + 311, says: [write(0x48, [0x55])] },
    ],
    yields: [],
  },
  "a target that holds SCL before every acknowledge, under both": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x12, 0x34])] },
      { at_ns: AT + 311, says: [write(0x48, [0x12, 0x3c])] },
    ],
    hold_ns: 14_503,
    yields: [[1, 22, "bit"]],
  },
  "a repeated START against a data 0": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x10]), read(0x48, 1)] },
      { at_ns: AT + 311, says: [write(0x48, [0x10, 0x22])] },
    ],
    yields: [[0, 18, "repeated-start"]],
  },
  "a STOP against a data 0": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x10])], habit: { susto_s: 2011e-9 } },
      { at_ns: AT + 311, says: [write(0x48, [0x10, 0x22])] },
    ],
    yields: [[0, 18, "stop"]],
  },
  "the same repeated START from both, and a contest after it": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x10]), read(0x48, 1)] },
      { at_ns: AT + 311, says: [write(0x48, [0x10]), read(0x48, 2)] },
    ],
    yields: [[0, 17, "bit"]],
  },
  "a START within another's START hold, almost too late": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x71])] },
      { at_ns: AT + 4_307, says: [write(0x48, [0x31])] },
    ],
    yields: [[0, 10, "bit"]],
  },
  "a controller that comes when the bus is busy waits for the STOP": {
    players: [
      { at_ns: AT, says: [write(0x48, [0x71])] },
      { at_ns: AT + 61_311, says: [write(0x48, [0x31])] },
    ],
    yields: [],
  },
};

const TARGET = { address: 0x48, data: 0xa6, delay_ns: 307 };

function ours({ players, hold_ns = 0 }: Situation): Recording {
  const { address, data, delay_ns } = TARGET;
  const delay = delay_ns * 1e-9;
  const hold = hold_ns * 1e-9;
  return simulate(
    scenario(1, END_S, {
      wire: INSTANT,
      controllers: players.map(({ at_ns, says, afterLoss = "leave", habit }, i) =>
        controller(
          `c${i}`,
          { ...TIMES, ...OWN[i], ...habit },
          { afterLoss, commit_s: 5e-6, jobs: [{ at_s: at_ns * 1e-9, message: says, resetAfter: null }] },
        ),
      ),
      targets: [
        target("level", address, {
          ackDelay_s: delay,
          releaseDelay_s: delay,
          dataDelay_s: delay,
          data: [data],
          stretch: hold > 0 ? [{ where: "ninth", bit: 0, byte: null, hold_s: [hold, hold], chance: 1 }] : [],
        }),
      ],
    }),
  );
}

function codeOf(step: Step): number {
  if (step.kind === "own") return step.value;
  if (step.kind === "theirs") return step.ack ? 5 : 2;
  return step.kind === "repeat" ? 3 : 4;
}

const MODE: Record<AfterLoss, number> = { leave: 0, byte: 1, "byte-ack": 2 };

function planOf({ at_ns, says, afterLoss = "leave", habit }: Player, index: number): number[] {
  const h = { ...TIMES, ...OWN[index], ...habit };
  const ns = [h.tlow_s, h.thigh_s, h.hdsta_s, h.susta_s, h.susto_s, h.buf_s, h.dataFall_s, h.dataRise_s, h.sample_s];
  const steps = scriptOf(says).map(codeOf);
  return [1, at_ns, ...ns.map((seconds) => Math.round(seconds * 1e9)), MODE[afterLoss], ...steps];
}

const hex = (words: readonly number[]) => `${words.map((word) => word.toString(16)).join("\n")}\n`;
let folder = "";

function verilog({ players, hold_ns = 0 }: Situation): string {
  const put = (name: string, words: readonly number[]) => writeFileSync(join(folder, name), hex(words));
  for (const place of [0, 1, 2]) put(`c${place}.hex`, players[place] ? planOf(players[place], place) : [0]);
  put("target.hex", [TARGET.address, TARGET.data, TARGET.delay_ns, hold_ns]);
  return execFileSync("vvp", ["-n", "situations"], { cwd: folder, encoding: "utf8", timeout: 60_000 });
}

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "firstlow-situations-"));
  const source = new URL("../../fixtures/simulators/situations.v", import.meta.url).pathname;
  execFileSync("iverilog", ["-g2005", "-o", "situations", source], { cwd: folder, timeout: 60_000 });
});

afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("the same situations on our bus and in Icarus Verilog", () => {
  it.each(Object.entries(situations))("%s", async (_, situation) => {
    const said = verilog(situation)
      .split("\n")
      .map((line) => line.split(" "));
    const recording = ours(situation);
    const { yields } = recording.truth;
    expect(yields.map(({ controller: who, bit_index, meant }) => [who, bit_index, meant])).toEqual(situation.yields);
    const theirs = said.filter(([word]) => word === "yield");
    expect(theirs.map(([, who, pulse, , meant]) => [Number(who), Number(pulse), meant])).toEqual(situation.yields);
    for (const [k, { decided_s }] of yields.entries())
      expect(Math.abs(decided_s * 1e9 - Number(theirs[k][3]))).toBeLessThan(SAME_NS);
    // Both of a tie end it in the same instant, so their order says nothing.
    const kept = recording.truth.transactions.flatMap((transaction) => transaction.kept);
    const told = said.filter(([word]) => word === "kept").map(([, who]) => Number(who));
    expect(told.sort()).toEqual(kept.sort());

    const { edges, head } = await readVcd(new Uint8Array(readFileSync(join(folder, "situation.vcd"))));
    const perNs = head.timebase.ticksPerSecond / 1e9;
    const seen = edges.map(({ tick, lines }) => ({ ns: tick / perNs, lines: lines & (SCL | SDA) }));
    const block = captureLevels(recording, { rate_hz: null, phase_s: 0, threshold: 0.5 });
    const own = Array.from({ length: block.length }, (_unused, i) => ({
      ns: block.ticks[i] / 1e3,
      lines: block.lines[i] & (SCL | SDA),
    }));
    expect(own.map(({ lines }) => lines)).toEqual(seen.map(({ lines }) => lines));
    for (const [k, edge] of own.entries()) expect(Math.abs(edge.ns - seen[k].ns), `edge ${k}`).toBeLessThan(SAME_NS);
    expect(own.length).toBeGreaterThan(40);
  });
});
