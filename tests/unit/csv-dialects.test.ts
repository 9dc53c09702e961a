// Every dialect of BRIEF.md and REFERENCE.md 6, written from one piece of traffic and read back to the same edges.

import { gzipSync } from "node:zlib";
import { describe, expect, test } from "vitest";
import { DEMO, type ReadBack, readText, type Step, sampled, traffic } from "../support/csv";

const steps = traffic(DEMO);
const rows = sampled(steps, 500);
const seconds = (ns: number, digits = 9) => (ns * 1e-9).toFixed(digits);
const table = (list: readonly Step[], row: (step: Step, i: number) => string, end = "\n") =>
  list.map((step, i) => row(step, i) + end).join("");
const plainRow = (step: Step) => `${seconds(step.at)},${step.scl},${step.sda}`;

/** Changes as the reader should report them, in picoseconds from `shift` nanoseconds. */
function expected(shift = 0): { ticks: number[]; lines: number[] } {
  const kept = steps.filter((step, i) => i === 0 || step.scl !== steps[i - 1].scl || step.sda !== steps[i - 1].sda);
  return { ticks: kept.map((step) => (step.at + shift) * 1000), lines: kept.map((step) => step.scl | (step.sda << 1)) };
}

function same(read: ReadBack, shift = 0): void {
  const want = expected(shift);
  expect(read.lines).toEqual(want.lines);
  expect(read.ticks).toEqual(want.ticks);
  expect(read.tail.rowsSetAside).toBe(0);
}

const codes = (read: ReadBack) => [...read.capture.head.warnings, ...read.tail.warnings].map((warning) => warning.code);

describe("delimiters and decimal marks", () => {
  const forms: readonly [string, string][] = [
    ["comma", `Time [s],SCL,SDA\n${table(rows, plainRow)}`],
    ["semicolon", `Time [s];SCL;SDA\n${table(rows, (s) => plainRow(s).replaceAll(",", ";"))}`],
    [
      "semicolon and decimal comma",
      `Time [s];SCL;SDA\n${table(rows, (s) => `${seconds(s.at).replace(".", ",")};${s.scl};${s.sda}`)}`,
    ],
    ["tab", `Time [s]\tSCL\tSDA\n${table(rows, (s) => plainRow(s).replaceAll(",", "\t"))}`],
    [
      "tab and decimal comma",
      `Time [s]\tSCL\tSDA\n${table(rows, (s) => `${seconds(s.at).replace(".", ",")}\t${s.scl}\t${s.sda}`)}`,
    ],
    ["runs of spaces", `Time    SCL  SDA\n${table(rows, (s) => `  ${seconds(s.at)}   ${s.scl}    ${s.sda}  `)}`],
    ["comma and space", `Time [s], SCL, SDA\n${table(rows, (s) => plainRow(s).replaceAll(",", ", "))}`],
    ["sep= hint", `sep=;\nTime [s];SCL;SDA\n${table(rows, (s) => plainRow(s).replaceAll(",", ";"))}`],
    ["bar", `Time [s]|SCL|SDA\n${table(rows, (s) => plainRow(s).replaceAll(",", "|"))}`],
  ];
  test.each(forms)("%s", async (_name, text) => same(await readText(text)));
});

describe("line ends, marks and encodings", () => {
  const text = `Time [µs],SCL,SDA\n${table(rows, (s) => `${(s.at / 1000).toFixed(3)},${s.scl},${s.sda}`)}`;
  const utf16 = (big: boolean) => {
    const bytes = new Uint8Array(2 + text.length * 2);
    bytes.set(big ? [0xfe, 0xff] : [0xff, 0xfe]);
    for (let i = 0; i < text.length; i += 1) {
      const unit = text.charCodeAt(i);
      bytes[2 + 2 * i + (big ? 0 : 1)] = unit >> 8;
      bytes[2 + 2 * i + (big ? 1 : 0)] = unit & 255;
    }
    return bytes;
  };
  const forms: readonly [string, string | Uint8Array][] = [
    ["LF", text],
    ["CRLF", text.replaceAll("\n", "\r\n")],
    ["CR", text.replaceAll("\n", "\r")],
    ["no line end after the last row", text.trimEnd()],
    ["UTF-8 with a mark", `\ufeff${text}`],
    ["UTF-8, U+03BC for micro", text.replace("\u00b5", "\u03bc")],
    ["UTF-16LE", utf16(false)],
    ["UTF-16BE", utf16(true)],
    ["UTF-16LE without a mark", utf16(false).slice(2)],
    ["Latin-1", Uint8Array.from(text, (letter) => letter.charCodeAt(0))],
    ["gzip", new Uint8Array(gzipSync(text))],
  ];
  test.each(forms)("%s", async (_name, content) => same(await readText(content)));

  test("gzip progress counts stored bytes", async () => {
    const stored = new Uint8Array(gzipSync(text));
    const read = await readText(stored);
    expect(read.capture.head.gzip).toBe(true);
  });
});

describe("units", () => {
  const scaled = (unit: string, factor: number, digits: number) =>
    `Time (${unit}),SCL,SDA\n${table(rows, (s) => `${(s.at * factor).toFixed(digits)},${s.scl},${s.sda}`)}`;
  const units: readonly [string, number, number][] = [
    ["s", 1e-9, 9],
    ["ms", 1e-6, 6],
    ["us", 1e-3, 3],
    ["µs", 1e-3, 3],
    ["ns", 1, 0],
    ["ps", 1000, 0],
    ["Seconds", 1e-9, 9],
    ["msec", 1e-6, 6],
    ["microseconds", 1e-3, 3],
  ];
  test.each(units)("time in %s", async (unit, factor, digits) => same(await readText(scaled(unit, factor, digits))));

  const headers: readonly [string, string][] = [
    ["units row", "Time,SCL,SDA\n(ms),(V),(V)\n"],
    ["units row without brackets", "Time,SCL,SDA\nms,,\n"],
    ["slash", "Time/ms,SCL,SDA\n"],
    ["underscore", "time_ms,SCL,SDA\n"],
    ["tight bracket", "Time(ms),SCL,SDA\n"],
    ["only units", "ms,SCL,SDA\n"],
    ["comment sign", "# Time [ms],SCL,SDA\n"],
  ];
  test.each(headers)("%s", async (_name, header) => {
    const volts = header.includes("(V)");
    const cell = (level: number) => (volts ? (level * 3.3).toFixed(2) : String(level));
    const read = await readText(header + table(rows, (s) => `${(s.at * 1e-6).toFixed(6)},${cell(s.scl)},${cell(s.sda)}`));
    expect(read.lines).toEqual(expected().lines);
    expect(codes(read)).not.toContain("time-unit-assumed");
    expect(read.capture.head.sampleTicks).toBe(500_000);
  });

  test("exponents and engineering suffixes", async () => {
    same(await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${(s.at * 1e-9).toExponential(9)},${s.scl},${s.sda}`)}`));
    same(await readText(`Time,SCL,SDA\n${table(rows, (s) => `${(s.at * 1e-3).toFixed(1)}u,${s.scl},${s.sda}`)}`));
    same(await readText(`Time,SCL,SDA\n${table(rows, (s) => `${(s.at * 1e-3).toFixed(1)} µs,${s.scl},${s.sda}`)}`));
  });

  test("millivolts become volts", async () => {
    const read = await readText(
      `Time [us],A [mV],B [mV]\n${table(rows, (s) => `${s.at / 1000},${s.scl * 3300},${s.sda * 3300}`)}`,
    );
    expect(read.capture.head.vdd_v).toBeCloseTo(3.3, 6);
    expect(read.lines).toEqual(expected().lines);
  });
});

describe("time axis", () => {
  test("negative start times", async () => {
    same(await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${seconds(s.at - 300_000)},${s.scl},${s.sda}`)}`), -300_000);
  });

  test("interval in the preamble, no time column", async () => {
    const body = table(rows, (s) => `${s.scl},${s.sda}`);
    for (const preamble of [
      "Sample interval,5e-7",
      "Sample Interval: 0.5 us",
      "Sampling rate,2 MHz",
      "Sample Rate (MHz),2",
      "# samplerate = 2000000",
      "Increment,500,ns",
    ]) {
      const read = await readText(`Device,bench scope\n${preamble}\nSCL,SDA\n${body}`);
      same(read);
      expect(codes(read)).toContain("interval-from-preamble");
      expect(read.capture.head.metadata[0]).toEqual(["Device", "bench scope"]);
    }
  });

  test("start and trigger in the preamble", async () => {
    const body = table(rows, (s) => `${s.scl},${s.sda}`);
    same(await readText(`Sample interval,500 ns\nStart time,-0.0001\nSCL,SDA\n${body}`), -100_000);
    same(await readText(`Sample interval,500 ns\nTrigger sample,200\nSCL,SDA\n${body}`), -100_000);
  });

  test("interval given by the person", async () => {
    const read = await readText(`SCL,SDA\n${table(rows, (s) => `${s.scl},${s.sda}`)}`, { interval_s: 5e-7 });
    same(read);
    expect(read.capture.head.timebase.origin).toBe("given");
  });

  test("no interval at all: ticks are sample numbers", async () => {
    const read = await readText(`SCL,SDA\n${table(rows, (s) => `${s.scl},${s.sda}`)}`);
    expect(read.capture.head.timebase).toEqual({ ticksPerSecond: 1, origin: "assumed" });
    expect(read.ticks).toEqual(expected().ticks.map((tick) => tick / 500_000));
    expect(codes(read)).toContain("interval-unknown");
  });

  test("running sample number with an interval", async () => {
    same(await readText(`Sample interval,500 ns\nSample,SCL,SDA\n${table(rows, (s, i) => `${i},${s.scl},${s.sda}`)}`));
  });

  test("only-on-change rows", async () => {
    const read = await readText(`Time [s],SCL,SDA\n${table(steps, plainRow)}`);
    same(read);
    expect(read.capture.head.sampleTicks).toBeNull();
  });

  test("rounded times with repeats: the uniform axis is rebuilt", async () => {
    const read = await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${seconds(s.at, 6)},${s.scl},${s.sda}`)}`);
    expect(codes(read)).toContain("time-rebuilt");
    expect(read.capture.head.sampleTicks).toBe(500_000);
    expect(read.lines).toEqual(expected().lines);
    expect(read.tail.rowsSetAside).toBe(0);
    for (let i = 0; i < read.ticks.length; i += 1)
      expect(Math.abs(read.ticks[i] - expected().ticks[i])).toBeLessThanOrEqual(1_000_000);
  });

  test("a time column for each channel, all alike", async () => {
    same(
      await readText(
        `Time A [s],SCL,Time B [s],SDA\n${table(rows, (s) => `${seconds(s.at)},${s.scl},${seconds(s.at)},${s.sda}`)}`,
      ),
    );
  });

  test("a time column for each channel, of different times and lengths", async () => {
    const scl = steps.filter((step, i) => i === 0 || step.scl !== steps[i - 1].scl);
    const sda = steps.filter((step, i) => i === 0 || step.sda !== steps[i - 1].sda);
    const lines = scl.map(
      (step, i) => `${seconds(step.at)},${step.scl},${i < sda.length ? `${seconds(sda[i].at)},${sda[i].sda}` : ","}`,
    );
    const read = await readText(`T1 [s],SCL,T2 [s],SDA\n${lines.join("\n")}\n`);
    same(read);
    expect(codes(read)).toContain("own-times");
    const volts = rows.map(
      (s, i) => `${seconds(s.at)},${(s.scl * 3.3).toFixed(2)},${seconds(s.at + 120)},${(rows[i].sda * 3.3).toFixed(2)}`,
    );
    const skewed = await readText(`T1 [s],SCL [V],T2 [s],SDA [V]\n${volts.join("\n")}\n`);
    expect(skewed.tail.sdaEdges).toBe(36);
    expect(skewed.tail.sclEdges).toBe(168);
    expect(skewed.ticks.every((tick, i) => i === 0 || tick > skewed.ticks[i - 1])).toBe(true);
  });

  test("few digits with exponents: fine at first, coarser than the step later", async () => {
    const read = await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${(s.at * 1e-9).toExponential(2)},${s.scl},${s.sda}`)}`);
    expect(codes(read)).toContain("time-rebuilt");
    same(read);
  });

  test("times past 2^53 ps are kept in coarser steps, and said", async () => {
    const read = await readText(
      `Time [s],SCL,SDA\n${table(rows, (s) => `${(20_000 + s.at * 1e-9).toFixed(7)},${s.scl},${s.sda}`)}`,
    );
    expect(read.capture.head.timebase.ticksPerSecond).toBe(1e11);
    expect(codes(read)).toContain("time-coarse");
    expect(read.lines).toEqual(expected().lines);
  });

  test("times are exact: 0.0000001 s is 100000 ps, not 99999.99", async () => {
    const read = await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${seconds(s.at + 0.1, 10)},${s.scl},${s.sda}`)}`);
    expect(read.ticks).toEqual(expected().ticks.map((tick) => tick + 100));
  });
});

describe("values", () => {
  const words: readonly [string, string, string][] = [
    ["true and false", "true", "false"],
    ["HIGH and LOW", "HIGH", "LOW"],
    ["H and L", "H", "L"],
    ["1.0 and 0.0", "1.0", "0.0"],
    ["on and off", "on", "off"],
    ["Z and 0", "Z", "0"],
  ];
  test.each(words)("%s", async (_name, high, low) => {
    const word = (level: number) => (level === 1 ? high : low);
    same(await readText(`Time [s],SCL,SDA\n${table(rows, (s) => `${seconds(s.at)},${word(s.scl)},${word(s.sda)}`)}`));
  });

  test("a packed word per row in hexadecimal", async () => {
    const read = await readText(
      `Time [s],Port\n${table(rows, (s) => `${seconds(s.at)},0x${(0x40 | (s.scl << 3) | (s.sda << 1)).toString(16)}`)}`,
    );
    same(read);
    expect(read.capture.head.proposal).toMatchObject({ scl: "@2[3]", sda: "@2[1]" });
  });

  test("a packed word of two bits, decimal or as digits", async () => {
    same(await readText(`Time [s],Bus\n${table(rows, (s) => `${seconds(s.at)},${s.scl | (s.sda << 1)}`)}`));
    same(await readText(`Time [s],Bus\n${table(rows, (s) => `${seconds(s.at)},${s.scl}${s.sda}`)}`));
  });

  test("raw converter counts: levels from their own clusters, no volts", async () => {
    const read = await readText(
      `Time [s],CH1,CH2\n${table(rows, (s, i) => `${seconds(s.at)},${s.scl * 170 + 40 + (i % 3)},${s.sda * 165 + 42 + (i % 2)}`)}`,
    );
    expect(read.lines).toEqual(expected().lines);
    expect(read.capture.head).toMatchObject({ levels: "volts", vdd_v: null, vil_v: null, vih_v: null });
    expect(read.capture.head.channels.map((channel) => channel.kind)).toEqual(["counts", "counts"]);
    expect(codes(read)).toContain("counts-without-scale");
    expect(read.blocks.every((block) => block.volts?.meanScl.every(Number.isNaN))).toBe(true);
  });

  test("no reading is unknown, never low", async () => {
    for (const word of ["", "NaN", "inf", "---", "x", "n/a"]) {
      const read = await readText(
        `Time [s],SCL,SDA\n${table(rows, (s, i) => (i >= 20 && i < 23 ? `${seconds(s.at)},${word},1` : plainRow(s)))}`,
      );
      expect(read.lines.slice(0, 3)).toEqual([3, 2 | 4, 3]);
      expect(read.ticks.slice(0, 3)).toEqual([0, 10_000_000, 11_500_000]);
      expect(read.tail.sclEdges).toBe(168);
      expect(read.tail.rowsSetAside).toBe(0);
    }
  });
});

describe("columns", () => {
  test("columns in any order, with more than needed", async () => {
    const read = await readText(
      `Index,SDA,Temp [C],Time [s],SCL,Note\n${table(rows, (s, i) => `${i},${s.sda},21.5,${seconds(s.at)},${s.scl},`)}`,
    );
    same(read);
    expect(read.capture.head.proposal).toMatchObject({ scl: "@5", sda: "@2" });
  });

  test("trailing delimiters, blank lines", async () => {
    same(await readText(`Time [s],SCL,SDA,\n\n${table(rows, (s, i) => `${plainRow(s)},${i % 7 === 0 ? "\n" : ""}`)}\n\n`));
  });

  test("no header at all", async () => {
    const read = await readText(table(rows, plainRow));
    same(read);
    expect(codes(read)).toEqual(expect.arrayContaining(["no-header", "time-unit-assumed"]));
    expect(read.capture.head.channels.map((channel) => channel.id)).toEqual(["@2", "@3"]);
  });

  test("key and value rows to the left of the first readings", async () => {
    const keys = ["Record Length,1901,Points", "Sample Interval,5e-07,s", "Source,CH1,"];
    const read = await readText(table(rows, (s, i) => `${keys[i] ?? ",,"},${plainRow(s)}`));
    same(read);
    expect(read.capture.head.metadata).toEqual([
      ["Record Length", "1901 Points"],
      ["Sample Interval", "5e-07 s"],
      ["Source", "CH1"],
    ]);
  });

  test("start and increment beside the names, values in the units row", async () => {
    const read = await readText(
      `X,A,B,Start,Increment\nSequence,Volt,Volt,-1.0e-04,5.0e-07\n${table(rows, (s, i) => `${i},${s.scl * 3.3},${s.sda * 3.3},`)}`,
    );
    expect(read.lines).toEqual(expected().lines);
    expect(read.ticks[0]).toBe(-100_000_000);
    expect(read.capture.head.sampleTicks).toBe(500_000);
  });

  test("notes on some rows, text in a column, times of day", async () => {
    same(await readText(`Time [s],SCL,SDA,Note\n${table(rows, (s, i) => `${plainRow(s)},${i === 20 ? "probe moved" : ""}`)}`));
    same(await readText(`Time [s],SCL,SDA,Note\n${table(rows, (s, i) => `${plainRow(s)},${i % 3 === 2 ? "seen" : ""}`)}`));
    same(await readText(`Date,Time [s],SCL,SDA\n${table(rows, (s) => `Tuesday,${plainRow(s)}`)}`));
    const day = await readText(
      `Time,SCL,SDA\n${table(rows, (s) => `00:00:${seconds(s.at).padStart(12, "0")},${s.scl},${s.sda}`)}`,
    );
    same(day);
  });

  test("pin numbers as names", async () => {
    const read = await readText(`Time [s],4,7\n${table(rows, plainRow)}`);
    same(read);
    expect(read.capture.head.channels.map((channel) => channel.name)).toEqual(["4", "7"]);
    same(await readText(`0,4,7\n${table(rows, plainRow)}`));
  });

  test("duplicate names, meaningless names", async () => {
    const read = await readText(`Time [s],In,In\n${table(rows, plainRow)}`);
    same(read);
    expect(read.capture.head.proposal.basis).toBe("behaviour");
  });

  test("swapped names: proposed by what the lines do", async () => {
    const read = await readText(`Time [s],SDA,SCL\n${table(rows, plainRow)}`);
    expect(read.capture.head.proposal).toMatchObject({ scl: "@2", sda: "@3" });
  });

  test("a person's choice by @N and by header cell", async () => {
    same(await readText(`Time [s],a,b\n${table(rows, plainRow)}`, { scl: "@2", sda: "b" }));
    const swapped = await readText(`Time [s],a,b\n${table(rows, plainRow)}`, { scl: "@3", sda: "@2" });
    expect(swapped.capture.head.proposal).toMatchObject({ scl: "@3", sda: "@2", basis: "given" });
  });

  test("drive taps in a file with a time column for each channel", async () => {
    const changes = (line: "scl" | "sda") => steps.filter((step, i) => i === 0 || step[line] !== steps[i - 1][line]);
    const scl = changes("scl");
    const sda = changes("sda");
    const cells = (list: readonly Step[], i: number, level: (step: Step) => number) =>
      i < list.length ? `${seconds(list[i].at)},${level(list[i])}` : ",";
    const lines = scl.map((_, i) =>
      [
        cells(scl, i, (s) => s.scl),
        cells(sda, i, (s) => s.sda),
        cells(scl, i, (s) => 1 - s.scl),
        cells(sda, i, (s) => 1 - s.sda),
      ].join(","),
    );
    const read = await readText(`T1 [s],SCL,T2 [s],SDA,T3 [s],drv_scl,T4 [s],drv_sda\n${lines.join("\n")}\n`, {
      scl: "SCL",
      sda: "SDA",
      taps: [
        { label: "M1", scl: "drv_scl", sda: "drv_sda", polarity: "drive" },
        { label: "M2", scl: null, sda: "drv_sda", polarity: "release" },
      ],
    });
    same(read);
    const of = (index: number) => read.taps.filter((tap) => tap.index === index);
    expect(of(0).flatMap((tap) => [...tap.block.lines])).toEqual(expected().lines);
    expect(of(0).flatMap((tap) => [...tap.block.ticks])).toEqual(expected().ticks);
    expect(of(1).flatMap((tap) => [...tap.block.ticks])).toEqual(sda.map((step) => step.at * 1000));
    expect(
      of(1)
        .flatMap((tap) => [...tap.block.lines])
        .slice(0, 3),
    ).toEqual([4, 6, 4]);
  });

  test("drive taps: 1 = released whatever the polarity of the file", async () => {
    const text = `Time [s],SCL,SDA,drv_scl,drv_sda\n${table(rows, (s) => `${plainRow(s)},${1 - s.scl},${1 - s.sda}`)}`;
    const read = await readText(text, {
      scl: "SCL",
      sda: "SDA",
      taps: [
        { label: "M1", scl: "drv_scl", sda: "drv_sda", polarity: "drive" },
        { label: "M2", scl: null, sda: "drv_sda", polarity: "release" },
      ],
    });
    const first = read.taps.filter((tap) => tap.index === 0).flatMap((tap) => [...tap.block.lines]);
    expect(first).toEqual(expected().lines);
    const second = read.taps.filter((tap) => tap.index === 1).flatMap((tap) => [...tap.block.lines]);
    expect(second.slice(0, 3)).toEqual([4, 6, 4]);
  });
});
