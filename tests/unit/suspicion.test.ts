import { describe, expect, test } from "vitest";
import { createRandom } from "@/lib/simulation/random";
import { LineScript, scripted } from "../support/line-script";

// What is on SDA is worked out here from each target's own bits and delay, as the wired-AND of the two.
interface Answers {
  readonly delay: number;
  readonly byte: (read: number, nth: number) => number;
}

const EARLY = 300;

/** Reads of four bytes each from 0x50; each target puts its bit out `delay` ns after SCL falls. */
function reads(count: number, targets: readonly Answers[], other: (bus: LineScript, i: number) => unknown = () => undefined) {
  const bus = new LineScript();
  const low = bus.low;
  for (let i = 0; i < count; i++) {
    other(bus, i);
    bus.start().byte(0xa1);
    let before = targets.map(() => 0);
    for (let nth = 0; nth < 4; nth++) {
      for (let bit = 7; bit >= 0; bit--) {
        const next = targets.map((target) => (target.byte(i, nth) >> bit) & 1);
        let at = 0;
        for (const [t, { delay }] of targets.entries()) {
          bus.wait(delay - at);
          at = delay;
          before = before.map((value, k) => (k === t ? next[k] : value));
          bus.move(0, before.every((value) => value === 1) ? 1 : 0);
        }
        const value = before.every((bit) => bit === 1) ? 1 : 0;
        bus
          .wait(low - at)
          .move(1, value)
          .wait(bus.high)
          .move(0, value);
      }
      bus.bit(nth < 3 ? 0 : 1);
      before = targets.map(() => (nth < 3 ? 0 : 1));
    }
    bus.stop().wait(20_000);
  }
  return bus;
}

const random = createRandom(11);
const noise = Array.from({ length: 400 }, () => random.int(0, 255));
const sensor = (read: number, nth: number) => noise[(4 * read + nth) % noise.length];

describe("two targets on one address, from levels alone", () => {
  test("answers that differ, by two delays, are a suspicion and fail nothing", async () => {
    const report = await scripted(
      reads(10, [
        { delay: EARLY, byte: sensor },
        { delay: 700, byte: (read, nth) => sensor(read + 31, nth) },
      ]),
    );
    expect(report.faults.map((fault) => fault.kind)).toEqual(["suspected-collision"]);
    expect(report.faults[0].detail).toMatch(/reads from address 0x50 .* for 400 ns between two zeros/);
    expect(report.verdict).toBe("pass");
  });

  test("changing data of one sensor is none", async () => {
    const report = await scripted(reads(40, [{ delay: EARLY, byte: sensor }]));
    expect(report.faults).toEqual([]);
  });

  test("two targets that answer alike show nothing", async () => {
    const report = await scripted(
      reads(10, [
        { delay: EARLY, byte: sensor },
        { delay: 700, byte: sensor },
      ]),
    );
    expect(report.faults).toEqual([]);
  });

  test("one target that lets go before every bit is none", async () => {
    const releasing = new LineScript();
    for (let i = 0; i < 20; i++) {
      releasing.start().byte(0xa1);
      for (let bit = 7; bit >= 0; bit--) {
        const value = ((sensor(i, 0) >> bit) & 1) as 0 | 1;
        releasing.wait(EARLY).move(0, 1).wait(400).move(0, value);
        releasing
          .wait(releasing.low - 700)
          .move(1, value)
          .wait(releasing.high)
          .move(0, value);
      }
      releasing.bit(1).stop().wait(20_000);
    }
    expect((await scripted(releasing)).faults).toEqual([]);
  });

  test("pulses of any width, as crosstalk makes them, are none", async () => {
    const bus = reads(20, [{ delay: EARLY, byte: sensor }], (script, i) => {
      script.start().byte(0xa1);
      for (let bit = 7; bit >= 0; bit--) {
        if (bit === 4)
          script
            .wait(500)
            .move(0, 1)
            .wait(100 + 37 * i)
            .move(0, 0);
        script.bit(0);
      }
      script.bit(1).stop().wait(20_000);
    });
    expect((await scripted(bus)).faults).toEqual([]);
  });

  test("the same pulses where a controller drives are noise, not a second target", async () => {
    const bus = reads(
      10,
      [
        { delay: EARLY, byte: sensor },
        { delay: 700, byte: (read, nth) => sensor(read + 31, nth) },
      ],
      (script) => {
        script.start().byte(0xa0);
        for (let bit = 7; bit >= 0; bit--) {
          if (bit < 7) script.wait(500).move(0, 1).wait(400).move(0, 0);
          script.bit(0);
        }
        script.bit(0).stop().wait(20_000);
      },
    );
    expect((await scripted(bus)).faults).toEqual([]);
  });
});

describe("the first SCL high after a stretch", () => {
  const stretched = (high: number | undefined) => {
    const bus = new LineScript();
    for (let i = 0; i < 6; i++) bus.write(0xa0, i, 2 * i);
    bus.start().byte(0xa0, true, { stretch: 60_000, high }).byte(7).stop();
    return scripted(bus.write(0xa0, 9));
  };

  test("is named where it is a runt, with the stretch and with its length", async () => {
    const report = await stretched(1500);
    const fault = report.faults.find((one) => one.kind === "runt-after-stretch");
    expect(fault).toMatchObject({ transaction: 6, detail: expect.stringContaining("lasts only 1.5 µs (byte 0, bit 8)") });
    expect(report.stretches).toMatchObject([{ transaction: 6, byte: 0, bit: 8, runt_s: 1.5e-6 }]);
    expect(report.verdict).toBe("fail");
  });

  test.each([undefined, 4000])("is not where it is long enough (%s)", async (high) => {
    const report = await stretched(high);
    expect(report.faults).toEqual([]);
    expect(report.stretches).toHaveLength(1);
    expect(report.stretches[0].runt_s).toBeUndefined();
  });

  test("a short high elsewhere is no runt after a stretch", async () => {
    const bus = new LineScript();
    for (let i = 0; i < 6; i++) bus.write(0xa0, i, 2 * i);
    bus.start().byte(0xa0, true, { stretch: 60_000 }).byte(7, true, { high: 3900 }).stop();
    const report = await scripted(bus);
    expect(report.violations.map((one) => one.parameter)).toContain("tHIGH");
    expect(report.faults).toEqual([]);
  });
});
