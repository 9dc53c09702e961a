import { describe, expect, test } from "vitest";
import { codesIn, explainCode } from "@/lib/diagnosis/codes";
import { duration, figure, rate } from "@/lib/diagnosis/format";
import { readLog } from "@/lib/diagnosis/log";
import { type Report, ReportSchema, type Summary } from "@/lib/diagnosis/report";
import { readRoster, writeRoster } from "@/lib/diagnosis/roster";
import { reportJson } from "@/lib/diagnosis/serial";
import { reportText } from "@/lib/diagnosis/text";
import { reportsLoss } from "@/lib/forensics/log-match";
import { LineScript, SCRIPT_HEAD, scripted } from "../support/line-script";

const MS = 1_000_000;
const many = () => {
  const bus = new LineScript();
  for (let i = 0; i < 30; i++)
    bus
      .write(0xa0, i, 255 - i)
      .start()
      .byte(0x90 | (i & 1), i % 3 === 0)
      .stop();
  return bus;
};

/** One capture of every kind that the report must be able to state. */
const CAPTURES: Record<string, () => Promise<Report>> = {
  nothing: () => scripted(new LineScript()),
  clean: () => scripted(new LineScript().write(0xa0, 1)),
  many: () => scripted(many()),
  tenBit: () => scripted(new LineScript().start().byte(0xf2).byte(0x34).repeated().byte(0xf3).byte(1, false).stop()),
  broken: () => scripted(new LineScript().start().byte(0xa0).bit(1).stop()),
  noAddress: () => scripted(new LineScript().start().bit(1).bit(0).stop()),
  cutShort: () => scripted(new LineScript().start().byte(0xa0).bit(1), 10),
  stuck: () => scripted(new LineScript().write(0xa0, 1).start().byte(0xa1).bit(1).rise(0), 5 * MS),
  phantom: () => scripted(new LineScript().move(1, 0), 3 * MS),
  generalCall: () => scripted(new LineScript().write(0x00, 0x06)),
  deviceId: () =>
    scripted(new LineScript().start().byte(0xf8).byte(0xa0).repeated().byte(0xf9).byte(1).byte(2).byte(3, false).stop()),
  startByte: () => scripted(new LineScript().start().byte(0x01, false).repeated().byte(0xa0).byte(1).stop()),
  highSpeed: () => scripted(new LineScript().start().byte(0x08, false).repeated().byte(0xa0).byte(1).stop()),
  smbus: () =>
    scripted(
      new LineScript()
        .start()
        .byte(0xa0)
        .byte(1, true, { stretch: 30 * MS })
        .stop(),
      100_000,
      { limits: "SMBus 2.0" },
    ),
  assumed: () =>
    scripted(new LineScript().write(0xa0, 1), 100, {}, { ...SCRIPT_HEAD, timebase: { ticksPerSecond: 1, origin: "assumed" } }),
  sampled: () => scripted(new LineScript().write(0xa0, 1), 100, {}, { ...SCRIPT_HEAD, sampleTicks: 1000 }),
};

describe.each(Object.entries(CAPTURES))("the report of %s", (_, made) => {
  test("keeps the schema, and its JSON in pieces is the same report", async () => {
    const report = await made();
    const checked = ReportSchema.safeParse(report);
    expect(checked.success ? "" : JSON.stringify(checked.error.issues)).toBe("");
    const { transactions, ...rest } = report;
    const summary: Summary = { ...rest, transactionCount: transactions.length };
    const text = [...reportJson(summary, transactions)].join("");
    expect(JSON.parse(text)).toEqual(JSON.parse(JSON.stringify(report)));
    expect(text.startsWith('{"schema":"firstlow.report/1"')).toBe(true);
  });

  test("reads as text without an empty or undefined word", async () => {
    const { transactions, ...rest } = await made();
    const text = [...reportText("capture.vcd", { ...rest, transactionCount: transactions.length }, transactions)].join("");
    expect(text).not.toMatch(/undefined|NaN|\[object/);
    expect(text).toContain(`Verdict: ${rest.verdict}`);
    expect(rest.lede?.length).toBeGreaterThanOrEqual(2);
  });
});

test("a transaction is stated as the contract says", async () => {
  const [first, second] = (await CAPTURES.tenBit()).transactions;
  expect(first).toMatchObject({
    opens: "S",
    closes: "Sr",
    address: 0x134,
    address_bits: 10,
    direction: "W",
    address_bytes: [
      { value: 0xf2, ack: true },
      { value: 0x34, ack: true },
    ],
    bytes: [],
  });
  expect(second).toMatchObject({
    opens: "Sr",
    closes: "P",
    address: 0x134,
    address_bits: 10,
    direction: "R",
    address_bytes: [{ value: 0xf3, ack: true }],
  });
  expect(second.bytes).toMatchObject([{ value: 1, ack: false, bits: 8 }]);
});

test("a broken address stands among the bytes with the bits it had", async () => {
  const [only] = (await CAPTURES.noAddress()).transactions;
  expect(only).toMatchObject({
    kind: "broken",
    address: null,
    address_bits: null,
    direction: null,
    address_bytes: [],
    address_ack: null,
  });
  expect(only.bytes).toMatchObject([{ value: 0b10, bits: 2, ack: null }]);
});

test("the slowest mode that the measured clock fits judges", async () => {
  const profile = async (low: number, high: number) =>
    (await scripted(new LineScript(low, high, 50).write(0xa0, 1, 2, 3))).limits.profile;
  expect(await profile(5500, 5000)).toBe("Standard-mode");
  expect(await profile(5500, 4500)).toBe("Standard-mode");
  expect(await profile(5499, 4500)).toBe("Fast-mode");
  expect(await profile(1500, 1000)).toBe("Fast-mode");
  expect(await profile(1400, 1000)).toBe("Fast-mode Plus");
  expect((await CAPTURES.highSpeed()).limits.profile).toBe("High-speed");
});

test("a few clocks that are too short do not change the mode, they break its limit", async () => {
  const bus = new LineScript();
  for (let i = 0; i < 6; i++) bus.write(0xa0, i);
  bus.start().byte(0xa0).bit(1, { low: 3000 }).bit(1);
  for (let i = 0; i < 7; i++) bus.bit(0);
  const report = await scripted(bus.stop());
  expect(report.limits.profile).toBe("Standard-mode");
  expect(report.verdict).toBe("fail");
  expect(report.measurements.find((row) => row.parameter === "tLOW")).toMatchObject({
    below: 1,
    min_s: 3e-6,
    limit_min_s: 4.7e-6,
  });
  expect(report.violations[0]).toMatchObject({
    transaction: 6,
    measured_s: 3e-6,
    limit_s: 4.7e-6,
    side: "min",
    parameter: "tLOW",
  });
  expect(report.lede?.join(" ")).toContain("tLOW 3 µs where at least 4.7 µs is due");
});

describe("roster", () => {
  const text =
    'role,name,address_7bit,address_8bit,tlow_s,thigh_s,vol_v,stretch_allow_s,registers\r\ntarget,"Level probe, north",0x48,0x90,,,0.12,0.001,00 level\r\ncontroller,Pump MCU,,,0.0000051,0.0000048,,,\r\n';
  test("goes in and comes out the same", () => {
    const read = readRoster(text);
    expect(read.ok && read.value[0]).toMatchObject({
      role: "target",
      address: 0x48,
      name: "Level probe, north",
      vol_v: 0.12,
      stretch_allow_s: 0.001,
    });
    expect(read.ok && writeRoster(read.value)).toBe(text);
  });

  test("either notation is enough", () => {
    const read = readRoster("name;address_8bit\nProbe;0xA1\n");
    expect(read.ok && read.value[0].address).toBe(0x50);
  });

  test("a name that a spreadsheet would run is disarmed, and comes back", () => {
    const entry = {
      role: "target",
      address: 1,
      name: "=SUM(A1)",
      tlow_s: null,
      thigh_s: null,
      vol_v: null,
      stretch_allow_s: null,
      registers: "",
    } as const;
    const written = writeRoster([entry]);
    expect(written).toContain("'=SUM(A1)");
    const read = readRoster(written);
    expect(read.ok && read.value[0].name).toBe("=SUM(A1)");
  });

  test.each([
    ["", /Line 1 .*empty/],
    ["role,name,colour\n", /Line 1 .*"colour"/],
    ["name,address_7bit\nProbe,0x4800\n", /Line 2 .*0x4800/],
    ["name,address_7bit,address_8bit\na,0x48,0x90\nb,0x48,0x92\n", /Line 3 .*do not agree/],
    ["name,role\nProbe,boss\n", /Line 2 .*boss/],
    ["name,vol_v\nProbe,-1\n", /Line 2 .*vol_v/],
    ['name\n"Probe\n', /Line 2.*quote/],
  ])("a mistake is told with its line: %j", (bad, message) => {
    const read = readRoster(bad);
    expect(read.ok ? "" : read.problem.message).toMatch(message);
  });
});

describe("controller log", () => {
  test.each([
    ["time,controller,message\n0.5,C1,arbitration lost\n", { time_s: 0.5, controller: "C1", message: "arbitration lost" }],
    ["time (ms),controller,message\n500,C1,ARLO\n", { time_s: 0.5, controller: "C1", message: "ARLO" }],
    ["0.5,C1,lost, again\n", { time_s: 0.5, controller: "C1", message: "lost, again" }],
    ["12.25 C1: arbitration lost\n", { time_s: 12.25, controller: "C1", message: "arbitration lost" }],
    ["[   12.250000] i2c i2c-1: timeout\n", { time_s: 12.25, controller: "i2c-1", message: "timeout" }],
    ["250 ms lost\n", { time_s: 0.25, controller: null, message: "lost" }],
    ["1970-01-01T00:00:02.5Z pump: EAGAIN\n", { time_s: 2.5, controller: "pump", message: "EAGAIN" }],
  ])("%j", (text, expected) => {
    const read = readLog(text);
    expect(read.ok && read.value[0]).toEqual(expected);
  });

  test("a line without a time is told with its number", () => {
    const read = readLog("0.1 C1: ok\nhello\n");
    expect(read.ok ? "" : read.problem.message).toMatch(/Line 2 .*hello/);
  });

  // Linux Documentation/i2c/fault-codes.rst.
  test("codes are explained", () => {
    expect(explainCode("write failed: -11")[0].code).toBe("EAGAIN");
    expect(explainCode("ENXIO from 0x50")[0].meaning).toContain("address");
    expect(explainCode("ARLO set")[0].meaning).toContain("read it low");
    expect(explainCode("all is well at 12.11 s")).toEqual([]);
    expect(codesIn(["transfer failed: -11", "EAGAIN again", "ENXIO"]).map(({ code }) => code)).toEqual(["EAGAIN", "ENXIO"]);
    const loss = (message: string) => reportsLoss({ time_s: 0, controller: null, message });
    expect(["xfer failed: -11", "errno 11", "ARLO", "arbitration lost"].map(loss)).toEqual([true, true, true, true]);
    expect(["-110", "after -11.5 ms", "done in 11 s"].map(loss)).toEqual([false, false, false]);
  });
});

test("times and rates are written as the trade writes them", () => {
  expect([4.7e-6, 250e-9, 0, 1, 35e-3, 1e-6, -2e-9].map(duration)).toEqual([
    "4.7 µs",
    "250 ns",
    "0 ns",
    "1 s",
    "35 ms",
    "1 µs",
    "-2 ns",
  ]);
  // A figure that would round onto its limit has the digits that part the two.
  expect(figure(4.7e-6, [4.7e-6])).toBe("4.7 µs");
  expect(figure(4.699999e-6, [4.7e-6, null])).toBe("4.699999 µs");
  expect(figure(4.8e-6, [4.7e-6])).toBe("4.8 µs");
  expect([rate(400e3, "Hz"), rate(40e6, "S/s")]).toEqual(["400 kHz", "40 MS/s"]);
});
