import { describe, expect, test } from "vitest";
import { FAULT_KINDS, type Fault, type FaultKind, type Report } from "@/lib/diagnosis/report";
import { RULES } from "@/lib/diagnosis/rules";
import { FAULT_WORDS } from "@/lib/diagnosis/wording";
import type { EdgeBlock } from "@/lib/engine/samples/edges";
import { pec } from "@/lib/limits/pec";
import { captureOf, LineScript, reportOf, SCRIPT_HEAD, scripted } from "../support/line-script";

// What forensics adds to a broken transaction (a controller would take it for lost arbitration) has tests of its own.
const ruled = (report: Report) => report.faults.filter((fault) => fault.kind !== "look-alike");
const kinds = (report: Report) => ruled(report).map((fault) => fault.kind);
const MS = 1_000_000;

function only(report: Report, kind: FaultKind): Fault {
  expect(kinds(report)).toEqual([kind]);
  return ruled(report)[0];
}

test("every kind of fault has a rule that says its clause, and words", () => {
  for (const kind of FAULT_KINDS) {
    expect(RULES[kind].meta.kind).toBe(kind);
    expect(RULES[kind].meta.clause.length).toBeGreaterThan(5);
    expect(FAULT_WORDS[kind].advice.length).toBeGreaterThan(20);
  }
});

describe("harmless things are no faults", () => {
  test("clean traffic passes", async () => {
    const report = await scripted(new LineScript().write(0xa0, 1, 2).write(0xa0, 3));
    expect(report.faults).toEqual([]);
    expect(report).toMatchObject({ verdict: "pass", limits: { profile: "Standard-mode", source: "UM10204" } });
  });

  test("a controller's NACK that ends a read is named with its place", async () => {
    const bus = new LineScript().write(0xa0, 1).start().byte(0xa1).byte(0x12).byte(0x34, false).stop();
    const report = await scripted(bus);
    expect(report.faults).toEqual([]);
    expect(report.harmless).toEqual([
      { kind: "read-end-nack", count: 1, places: [{ transaction: 1, time_s: expect.any(Number) }] },
    ]);
  });

  test.each([
    ["a general call", 0x00],
    ["a START byte", 0x01],
    ["an Hs controller code", 0x08],
  ])("no acknowledge of %s", async (_, byte) => {
    expect((await scripted(new LineScript().start().byte(byte, false).stop().write(0xa0, 1))).faults).toEqual([]);
  });

  test.each([
    ["shorter than tSP", 40],
    ["longer than tSP", 300],
  ])("a handover pulse on SDA while SCL is low, %s", async (_, width) => {
    const bus = new LineScript().start().byte(0xa0);
    bus.wait(200).move(0, 1).wait(width).move(0, 0);
    const report = await scripted(bus.byte(7).stop().write(0xa0, 1));
    expect(report.faults).toEqual([]);
    expect(report.harmless).toEqual([
      { kind: "ack-handover", count: 1, places: [{ transaction: 0, time_s: expect.any(Number) }] },
    ]);
    expect(report.transactions[0].bytes.map((byte) => byte.value)).toEqual([7]);
  });

  test.each([40, 300])("a pulse of %d ns on SDA while SCL is low inside a byte is no handover", async (width) => {
    const bus = new LineScript().start().byte(0xa0);
    for (const value of [0, 0, 0] as const) bus.bit(value);
    bus.wait(200).move(0, 1).wait(width).move(0, 0);
    for (const value of [0, 0, 0, 1, 1, 0] as const) bus.bit(value);
    const report = await scripted(bus.stop());
    expect(report.faults).toEqual([]);
    expect(report.harmless).toMatchObject([{ kind: "low-pulse", count: 1 }]);
    expect(report.transactions[0].bytes.map((byte) => byte.value)).toEqual([3]);
  });

  test("a long stretch, where no SMBus profile judges", async () => {
    const report = await scripted(
      new LineScript()
        .start()
        .byte(0xa0)
        .byte(1, true, { stretch: 40 * MS })
        .stop()
        .write(0xa0, 2),
    );
    expect(report.faults).toEqual([]);
  });

  test("a controller that pauses under a high SCL and then goes on", async () => {
    const bus = new LineScript().write(0xa0, 1).start().byte(0xa0).bit(1).bit(0, { high: 600_000 });
    for (const value of [1, 0, 1, 0, 1, 0, 0] as const) bus.bit(value);
    expect((await scripted(bus.stop())).faults).toEqual([]);
  });

  test("the end of the record in the middle of a transfer", async () => {
    expect((await scripted(new LineScript().write(0xa0, 1).start().byte(0xa0).bit(1), 3_000)).faults).toEqual([]);
  });
});

test("address-nack gives both forms of the address", async () => {
  const fault = only(await scripted(new LineScript().start().byte(0x90, false).stop()), "address-nack");
  expect(fault.transaction).toBe(0);
  expect(fault.detail).toContain("0x48 (8-bit 0x90");
});

test("data-nack of a write", async () => {
  const fault = only(await scripted(new LineScript().start().byte(0xa0).byte(1).byte(2, false).stop()), "data-nack");
  expect(fault.detail).toContain("data byte 1 (0x02)");
});

test("data-nack of a read that goes on", async () => {
  const fault = only(await scripted(new LineScript().start().byte(0xa1).byte(1, false).byte(2, false).stop()), "data-nack");
  expect(fault.detail).toContain("went on reading");
});

describe("missing-stop", () => {
  test("before the next START", async () => {
    const bus = new LineScript()
      .start()
      .byte(0xa0)
      .byte(1)
      .rise(1)
      .wait(0.3 * MS)
      .write(0xa0, 2);
    const fault = only(await scripted(bus), "missing-stop");
    expect(fault).toMatchObject({ transaction: 0, detail: expect.stringContaining("300 µs") });
  });

  test("at the end of the record", async () => {
    const bus = new LineScript().write(0xa0, 1).start().byte(0xa0).byte(1).rise(1);
    expect(only(await scripted(bus, 2 * MS), "missing-stop").transaction).toBe(1);
  });

  test("an ordinary repeated START is none", async () => {
    const bus = new LineScript().start().byte(0xa0).byte(1).repeated().byte(0xa1).byte(2, false).stop();
    expect((await scripted(bus)).faults).toEqual([]);
  });
});

test("misplaced-stop and short-byte", async () => {
  const report = await scripted(new LineScript().start().byte(0xa0).bit(1).bit(0).bit(1).stop());
  expect(kinds(report).sort()).toEqual(["misplaced-stop", "short-byte"]);
  expect(report.faults.find((fault) => fault.kind === "misplaced-stop")?.detail).toBe("STOP after 3 bits of data byte 0");
});

test("a STOP in place of the acknowledge is misplaced, and the byte is whole", async () => {
  const bus = new LineScript().start().byte(0xa0);
  for (let i = 0; i < 8; i++) bus.bit(0);
  expect(only(await scripted(bus.stop()), "misplaced-stop").detail).toContain("in place of the acknowledge of data byte 0");
});

test("misplaced-start", async () => {
  const report = await scripted(new LineScript().start().byte(0xa0).bit(1).repeated().byte(0xa0).byte(1).stop());
  expect(kinds(report).sort()).toEqual(["misplaced-start", "short-byte"]);
});

test("void-message is worth knowing and does not fail a capture", async () => {
  const report = await scripted(new LineScript().write(0xa0, 1).move(1, 0).wait(6000).move(1, 1).wait(50_000).write(0xa0, 2));
  only(report, "void-message");
  expect(report.verdict).toBe("pass");
});

describe("tSP (UM10204 Table 10: pulses under 50 ns are suppressed)", () => {
  const withPulse = (width: number) => {
    const bus = new LineScript().write(0xa0, 1).start().byte(0xa0).bit(1);
    bus.wait(2500).move(1, 1).wait(width).move(0, 1).wait(3000);
    for (const value of [0, 1, 0, 1, 0, 1, 0] as const) bus.bit(value);
    return scripted(bus.bit(0).stop());
  };

  // UM10204 Rev 7 Table 10, tSP: input filters suppress spikes of less than 50 ns.
  test("49 ns on SCL is a spike, and not acted on", async () => {
    const report = await withPulse(49);
    expect(only(report, "spike")).toMatchObject({ transaction: 1, detail: expect.stringContaining("49 ns") });
    expect(report.transactions[1].bytes).toEqual([{ value: 0b10101010, ack: true, bits: 8, start_s: expect.any(Number) }]);
    expect(report.measurements.find((row) => row.parameter === "tHIGH")?.below).toBe(0);
  });

  test("51 ns on SCL is a clock, acted on and said", async () => {
    const report = await withPulse(51);
    expect(kinds(report)).toContain("bit-slip");
    expect(kinds(report)).not.toContain("spike");
    expect(report.measurements.find((row) => row.parameter === "tHIGH")?.below).toBe(1);
    expect(report.violations.some((violation) => violation.parameter === "tHIGH" && violation.measured_s === 51e-9)).toBe(true);
  });

  test("a spike on SDA while SCL is high", async () => {
    const bus = new LineScript()
      .start()
      .byte(0xa0)
      .wait(600)
      .move(0, 1)
      .wait(4900)
      .move(1, 1)
      .wait(2000)
      .move(1, 0)
      .wait(30)
      .move(1, 1);
    bus.wait(2970).move(0, 1);
    for (let i = 0; i < 7; i++) bus.bit(1);
    only(await scripted(bus.bit(0).stop()), "spike");
  });
});

test.each([
  ["down and up", 1, 0],
  ["up and down", 0, 1],
] as const)("sda-change-while-high: %s within one SCL high", async (_, from, to) => {
  const bus = new LineScript().start().byte(0xa0).bit(1).wait(600).move(0, from).wait(4900);
  bus.move(1, from).wait(1500).move(1, to).wait(800).move(1, from).wait(2700).move(0, from);
  for (let i = 0; i < 7; i++) bus.bit(1);
  const report = await scripted(bus.stop().write(0xa0, 1));
  const fault = report.faults.find((candidate) => candidate.kind === "sda-change-while-high");
  expect(fault).toMatchObject({ transaction: 0, detail: expect.stringContaining("800 ns") });
  expect(kinds(report)).not.toContain("void-message");
  expect(kinds(report)).not.toContain("misplaced-start");
});

test("scl-stuck-low names the edge and who had the line", async () => {
  const bus = new LineScript().write(0xa0, 1).start().byte(0xa1).bit(1).bit(0);
  const since = bus.now;
  const fault = only(await scripted(bus, 5 * MS), "scl-stuck-low");
  expect(fault).toMatchObject({
    transaction: 1,
    time_s: since / 1e9,
    detail: expect.stringContaining("the target was sending data byte 0, after 2 bits"),
  });
});

test("sda-stuck-low to the end of the record", async () => {
  const bus = new LineScript().write(0xa0, 1).start().byte(0xa1).bit(1).bit(0).rise(0);
  const fault = only(await scripted(bus, 5 * MS), "sda-stuck-low");
  expect(fault.detail).toContain("to the end of the record");
});

test("bus-clear says on which clock SDA came free", async () => {
  const bus = new LineScript()
    .write(0xa0, 1)
    .start()
    .byte(0xa1)
    .bit(1)
    .rise(0)
    .wait(2 * MS)
    .move(0, 0);
  for (let clock = 1; clock <= 9; clock++) bus.bit(clock < 5 ? 0 : 1);
  const report = await scripted(bus.stop().write(0xa0, 2));
  expect(kinds(report)).toEqual(["sda-stuck-low", "bus-clear"]);
  expect(report.faults[0].detail).toContain("the target was sending data byte 0");
  expect(report.faults[1].detail).toContain("SDA was free on clock 5");
});

test("phantom-start", async () => {
  const fault = only(await scripted(new LineScript().write(0xa0, 1).move(1, 0), 3 * MS), "phantom-start");
  expect(fault.transaction).toBe(1);
});

test("reserved-address is a remark", async () => {
  const report = await scripted(new LineScript().write(0x06, 1));
  only(report, "reserved-address");
  expect(report.verdict).toBe("pass");
});

describe("pec-mismatch", () => {
  const read = (bus: LineScript, low: number, flip: number) => {
    const code = pec([0xb4, 0x07, 0xb5, low, 0x3a]) ^ flip;
    return bus.start().byte(0xb4).byte(0x07).repeated().byte(0xb5).byte(low).byte(0x3a).byte(code, false).stop();
  };

  test("is told on a device that shows the habit", async () => {
    const bus = new LineScript();
    for (let i = 0; i < 12; i++) read(bus, i * 7, i === 8 ? 0x10 : 0);
    const fault = only(await scripted(bus), "pec-mismatch");
    expect(fault.transaction).toBe(8 * 2 + 1);
  });

  test("is never told on a bus without the habit", async () => {
    const bus = new LineScript();
    for (let i = 0; i < 40; i++) bus.write(0xa0, i, (i * 73) & 0xff, (i * 31) & 0xff);
    expect((await scripted(bus)).faults).toEqual([]);
  });

  test("a chance fit in a write word does not make a habit", async () => {
    const bus = new LineScript();
    bus.write(0xa0, 0x10, 0x55, pec([0xa0, 0x10, 0x55]));
    for (let i = 0; i < 10; i++) bus.write(0xa0, 0x10, i, 0x77);
    expect((await scripted(bus)).faults).toEqual([]);
  });
});

describe("smbus-timeout", () => {
  const stretched = (ms: number) =>
    new LineScript()
      .start()
      .byte(0xa0)
      .byte(1, true, { stretch: ms * MS })
      .stop()
      .write(0xa0, 2);
  test("27 ms is one where an SMBus profile judges", async () => {
    const report = await scripted(stretched(27), 100_000, { limits: "SMBus 2.0" });
    expect(new Set(kinds(report))).toEqual(new Set(["smbus-timeout"]));
    expect(report.faults[0].detail).toContain("25 ms");
  });

  test("20 ms is none", async () => {
    expect(kinds(await scripted(stretched(20), 100_000, { limits: "SMBus 2.0" }))).toEqual([]);
  });

  test("a clock that is never released", async () => {
    const report = await scripted(new LineScript().write(0xa0, 1).start().byte(0xa0), 40 * MS, { limits: "SMBus 2.0" });
    expect(kinds(report)).toContain("smbus-timeout");
    expect(kinds(report)).toContain("scl-stuck-low");
  });
});

describe("in volts", () => {
  const VOLTS = { ...SCRIPT_HEAD, levels: "volts", vdd_v: 3.3, vil_v: 0.99, vih_v: 2.31 } as const;
  // Every line rises and falls in `lead` ns and stands at the levels given.
  function inVolts(script: LineScript, lead: number, level: (lines: number, i: number) => number): EdgeBlock {
    const { ticks, lines, length } = script.edges();
    const column = (make: (i: number) => number) => Float32Array.from({ length }, (_, i) => make(i));
    const changed = (i: number, line: number) => i > 0 && ((lines[i] ^ lines[i - 1]) & line) !== 0;
    return {
      length,
      ticks,
      lines,
      volts: {
        leadScl: column((i) => (changed(i, 1) ? lead : 0)),
        leadSda: column((i) => (changed(i, 2) ? lead : 0)),
        meanScl: column((i) => ((lines[i] & 1) !== 0 ? 3.3 : level(lines[i], i))),
        meanSda: column((i) => ((lines[i] & 2) !== 0 ? 3.3 : level(lines[i], i))),
      },
    };
  }
  const analysed = (script: LineScript, lead: number, level: (lines: number, i: number) => number) =>
    reportOf(captureOf([inVolts(script, lead, level)], script.now + 100_000, VOLTS));

  test("low-swing: 0.6 V is not low enough at 3.3 V, 0.2 V is", async () => {
    const script = () => new LineScript().write(0xa0, 0x55);
    expect((await analysed(script(), 200, () => 0.2)).faults).toEqual([]);
    expect(only(await analysed(script(), 200, () => 0.6), "low-swing").detail).toContain("0.60 V");
  });

  test("slow-rise beyond the profile's tr, and the RC that it implies", async () => {
    const report = await analysed(new LineScript().write(0xa0, 0x55), 1200, () => 0.1);
    expect(new Set(kinds(report))).toEqual(new Set(["slow-rise"]));
    expect(report.measurements.find((row) => row.parameter === "tr")?.above).toBeGreaterThan(0);
    expect(report.levels?.rc_s).toBeCloseTo(1200e-9 / Math.log(0.7 / 0.3), 9);
    expect(report.levels?.rp_min_ohm).toBeCloseTo(966.667, 2);
  });

  test("address-collision: zeros of one read byte at two levels", async () => {
    const script = new LineScript()
      .start()
      .byte(0xa1)
      .byte(0x0f & 0x11)
      .byte(0xff, false)
      .stop();
    const report = await analysed(script, 100, (_, i) => (i % 6 < 3 ? 0.08 : 0.28));
    expect(kinds(report)).toContain("address-collision");
  });

  // Of this write the low before the ninth bit lies from 108 500 to 114 000 ns; the fifth bit is low from 66 500 to 72 000 ns and then
  // high until 77 000 ns.
  const visited = (line: "scl" | "sda", tick: number, extreme_v = 1.6) => {
    const script = new LineScript().write(0xa0, 0x55);
    const excursion = { line, tick, width: 300, extreme_v } as const;
    return reportOf(captureOf([inVolts(script, 200, () => 0.1)], script.now, VOLTS, [excursion]));
  };

  test("between-thresholds", async () => {
    const report = await visited("sda", 75_000);
    expect(only(report, "between-thresholds").detail).toContain("SDA went to 1.60 V for 300 ns");
    expect(report.harmless).toEqual([]);
  });

  test("a dip that reaches no threshold is harmless, on either line", async () => {
    for (const line of ["scl", "sda"] as const) {
      const report = await visited(line, 75_000, 2.5);
      expect(report.faults).toEqual([]);
      expect(report.harmless).toMatchObject([{ kind: "crosstalk-dip", count: 1, places: [{ transaction: 0 }] }]);
    }
  });

  test.each([
    ["ack-handover", 110_500],
    ["low-pulse", 69_000],
  ])("between-thresholds on SDA while SCL is low is harmless: %s", async (kind, tick) => {
    const report = await visited("sda", tick);
    expect(report.faults).toEqual([]);
    expect(report.harmless).toMatchObject([{ kind, count: 1, places: [{ transaction: 0 }] }]);
    // The same on SCL itself may be taken for a clock.
    expect(only(await visited("scl", tick), "between-thresholds").transaction).toBe(0);
  });
});

test("look-alike: what forensics concluded is listed, and does not fail a capture by itself", () => {
  const found: unknown[] = [];
  const watch = RULES["look-alike"].watch({
    base: SCRIPT_HEAD.timebase,
    add: (...fault) => found.push(fault),
    harmless() {},
  });
  const concluded: Fault = { kind: "look-alike", transaction: 3, time_s: 2e-3, detail: "a target held SDA" };
  const end = { lookAlikes: [concluded] };
  watch.conclude?.(end as unknown as Parameters<NonNullable<typeof watch.conclude>>[0]);
  expect(found).toEqual([["look-alike", 2_000_000, "a target held SDA", 3]]);
  expect(FAULT_WORDS["look-alike"].fails).toBe(false);
});

test("nothing is judged on an assumed time base", async () => {
  const head = { ...SCRIPT_HEAD, timebase: { ticksPerSecond: 1, origin: "assumed" }, sampleTicks: 1 } as const;
  const report = await scripted(new LineScript().write(0xa0, 1), 1000, {}, head);
  expect(report.verdict).toBe("undecided");
  expect(report.measurements.every((row) => row.limit_min_s === null && row.below === 0)).toBe(true);
  expect(report.capture.sample_interval_s).toBeNull();
});
