import { describe, expect, test } from "vitest";
import { type Recording, simulate } from "@/lib/simulation/bus";
import { controller, type HABIT, scenario, target, WIRE } from "@/lib/simulation/plan";
import { captureLevels, captureTap, crossings } from "@/lib/simulation/sampling";
import { read, write } from "@/lib/simulation/script";

const EVERY = { rate_hz: null, phase_s: 0, threshold: 0.5 };

interface Pulse {
  readonly low: number;
  readonly high: number;
  readonly sda: number;
}

/** SCL pulses in microseconds as a bystander sees them, and SDA in the middle of each high. */
function pulses(recording: Recording): Pulse[] {
  const block = captureLevels(recording, EVERY);
  const out: Pulse[] = [];
  let fall = Number.NaN;
  let rise = Number.NaN;
  for (let e = 1; e < block.length; e++) {
    const was = block.lines[e - 1] & 1;
    const is = block.lines[e] & 1;
    if (was === 1 && is === 0) {
      if (!Number.isNaN(fall))
        out.push({ low: (rise - fall) / 1e6, high: (block.ticks[e] - rise) / 1e6, sda: (block.lines[e - 1] >> 1) & 1 });
      fall = block.ticks[e];
    } else if (was === 0 && is === 1) rise = block.ticks[e];
  }
  return out;
}

const job = (at_s: number, ...message: ReturnType<typeof write>[]) => ({ at_s, message, resetAfter: null });
const quiet = { jitter_s: 0 };

function pair(
  a: Partial<typeof HABIT>,
  b: Partial<typeof HABIT>,
  first: number[],
  second: number[],
  afterLoss: "leave" | "byte" | "byte-ack" = "leave",
) {
  return simulate(
    scenario(1, 4e-3, {
      controllers: [
        controller("pump", { ...quiet, ...a }, { jobs: [job(1e-4, write(0x48, first))] }),
        controller("gateway", { ...quiet, ...b }, { jobs: [job(1e-4 + 1e-6, write(0x48, second))], afterLoss }),
      ],
      targets: [target("level", 0x48)],
    }),
  );
}

describe("simulated bus", () => {
  test("one controller: the bytes it was told to send, acknowledged, nine pulses a byte", () => {
    const recording = simulate(
      scenario(1, 1e-3, {
        controllers: [controller("pump", quiet, { jobs: [job(1e-4, write(0x48, [0xa5]))] })],
        targets: [target("level", 0x48)],
      }),
    );
    expect(pulses(recording).map((p) => p.sda)).toEqual([1, 0, 0, 1, 0, 0, 0, 0, 0, 1, 0, 1, 0, 0, 1, 0, 1, 0]);
    expect(recording.truth.transactions).toHaveLength(1);
    expect(recording.truth.transactions[0]).toMatchObject({ pulses: 18, controllers: [0], kept: [0] });
    expect(recording.truth.yields).toEqual([]);
  });

  test("UM10204 3.1.7: LOW is the longest, HIGH the shortest, while both clock", () => {
    const recording = pair({ tlow_s: 5e-6, thigh_s: 4e-6 }, { tlow_s: 6e-6, thigh_s: 5e-6 }, [0x10], [0x11]);
    const contested = pulses(recording).slice(0, 17);
    // The loser (index 1) sends 0x11 and finds out at the last data bit; until then its longer LOW and the other's shorter HIGH stand.
    for (const pulse of contested.slice(1, 16)) {
      // Input filter and the rise to VIH add about 0.1 us to what a controller counts.
      expect(Math.abs(pulse.low - 6.1)).toBeLessThan(0.1);
      expect(Math.abs(pulse.high - 4.1)).toBeLessThan(0.1);
    }
    expect(recording.truth.yields[0]).toMatchObject({ controller: 1, transaction: 0, bit_index: 16, meant: "bit", alone: false });
  });

  test("UM10204 3.1.8: the first 1 against a 0 loses, the winner's message is untouched, the loser tries again", () => {
    const recording = pair({}, { tlow_s: 5.4e-6 }, [0b0110_0000], [0b0110_1000]);
    expect(recording.truth.yields).toHaveLength(1);
    expect(recording.truth.yields[0]).toMatchObject({ controller: 1, bit_index: 13, retry: 1 });
    expect(recording.truth.transactions.map((t) => t.kept)).toEqual([[0], [1]]);
    expect(recording.truth.transactions[0].controllers).toEqual([0, 1]);
    const bits = pulses(recording).map((p) => p.sda);
    expect(bits.slice(9, 17)).toEqual([0, 1, 1, 0, 0, 0, 0, 0]);
    // The high of the STOP and START between them is a pulse too.
    expect(bits.slice(28, 36)).toEqual([0, 1, 1, 0, 1, 0, 0, 0]);
  });

  test("the numerically lowest stream wins whoever started first (TI SPRUJ53 via REFERENCE 2.4)", () => {
    for (let low = 0; low < 16; low++) {
      const other = (low * 7 + 3) % 256;
      if (other === low) continue;
      const recording = pair({}, {}, [low], [other]);
      expect(recording.truth.transactions[0].kept).toEqual([low < other ? 0 : 1]);
    }
  });

  test("UM10204 3.1.8: the loser may clock to the end of its byte", () => {
    const at = (afterLoss: "leave" | "byte" | "byte-ack") =>
      pulses(pair({}, { tlow_s: 6e-6 }, [0x00, 0x00], [0x40, 0x00], afterLoss)).map((p) => p.low > 5.5);
    const lastLong = (list: boolean[]) => list.slice(0, 27).lastIndexOf(true);
    expect(lastLong(at("leave"))).toBe(10);
    expect(lastLong(at("byte"))).toBe(16);
    expect(lastLong(at("byte-ack"))).toBe(17);
  });

  test("identical messages: nobody loses, both make the STOP", () => {
    const recording = pair({}, { tlow_s: 5.3e-6 }, [0x33], [0x33]);
    expect(recording.truth.yields).toEqual([]);
    expect(recording.truth.transactions[0].kept.toSorted()).toEqual([0, 1]);
  });

  test("read against write at one address: write wins at the R/W bit (0 before 1)", () => {
    const recording = simulate(
      scenario(1, 3e-3, {
        controllers: [
          controller("pump", quiet, { jobs: [job(1e-4, read(0x48, 1))] }),
          controller("gateway", quiet, { jobs: [job(1e-4, write(0x48, [1]))] }),
        ],
        targets: [target("level", 0x48)],
      }),
    );
    expect(recording.truth.yields[0]).toMatchObject({ controller: 0, bit_index: 7 });
  });

  test("ACK beats NACK: the controller that wants to go on reading keeps the bus", () => {
    const recording = simulate(
      scenario(1, 3e-3, {
        controllers: [
          controller("pump", quiet, { jobs: [job(1e-4, read(0x48, 1))] }),
          controller("gateway", quiet, { jobs: [job(1e-4, read(0x48, 2))] }),
        ],
        targets: [target("level", 0x48)],
      }),
    );
    expect(recording.truth.yields[0]).toMatchObject({ controller: 0, bit_index: 17 });
  });

  test("a START against a busy bus is not made", () => {
    const recording = simulate(
      scenario(1, 3e-3, {
        controllers: [
          controller("pump", quiet, { jobs: [job(1e-4, write(0x48, [1, 2, 3]))] }),
          controller("gateway", quiet, { jobs: [job(1.5e-4, write(0x20, [1]))] }),
        ],
        targets: [target("level", 0x48), target("valve", 0x20)],
      }),
    );
    expect(recording.truth.yields).toEqual([]);
    expect(recording.truth.transactions.map((t) => t.controllers)).toEqual([[0], [1]]);
  });

  test("a stretching target holds SCL low where its rule says", () => {
    const stretch = [{ where: "after-ack" as const, bit: 0, byte: null, hold_s: [40e-6, 40e-6] as const, chance: 1 }];
    const recording = simulate(
      scenario(1, 2e-3, {
        controllers: [controller("pump", quiet, { jobs: [job(1e-4, write(0x20, [1, 2]))] })],
        targets: [target("valve", 0x20, { stretch })],
      }),
    );
    const long = pulses(recording).flatMap((p, i) => (p.low > 20 ? [i] : []));
    expect(long).toEqual([9, 18]);
    expect(recording.truth.stretches.map((s) => s.pulse)).toEqual([9, 18, 27]);
  });

  test("UM10204 7.1: the rise from 30 % to 70 % takes 0.8473 RC", () => {
    const recording = pair({}, {}, [0x01], [0x02]);
    const high = crossings(recording.scl, 0.7 * WIRE.vdd_v, recording.endPs);
    const low = crossings(recording.scl, 0.3 * WIRE.vdd_v, recording.endPs);
    const rise = (list: typeof high) => list.at.filter((_, i) => list.level[i] === 1)[3];
    const rc = WIRE.pullup_ohm * WIRE.sclCapacitance_f * 1e12;
    expect((rise(high) - rise(low)) / rc).toBeCloseTo(0.8473, 2);
  });

  test("a tap shows the loser letting go while the bus is low", () => {
    const recording = pair({}, {}, [0x10], [0x11]);
    const tap = captureTap(recording, 1, EVERY);
    const decided = recording.truth.yields[0].decided_s * 1e12;
    let i = 0;
    while (i + 1 < tap.length && tap.ticks[i + 1] <= decided) i++;
    expect(tap.lines[i] & 2).toBe(2);
    expect(recording.sda.target.length).toBeGreaterThan(10);
  });

  test("equal seeds give equal recordings, other seeds other ones", () => {
    const run = (seed: number) =>
      captureLevels(
        simulate(
          scenario(seed, 1e-3, {
            controllers: [controller("pump", { jitter_s: 20e-9 }, { jobs: [job(1e-4, write(0x48, [1]))] })],
            targets: [],
          }),
        ),
        EVERY,
      ).ticks.join();
    expect(run(5)).toBe(run(5));
    expect(run(5)).not.toBe(run(6));
  });
});
