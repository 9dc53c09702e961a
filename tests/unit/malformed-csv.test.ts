// Bad CSVs and files that are none: what the person is told, and where. Code, place and the telling words are asserted.

import { gzipSync } from "node:zlib";
import { describe, expect, test } from "vitest";
import type { ReadChoices } from "../../lib/engine/samples/reader";
import { DEMO, openText, readText, type Step, sampled, traffic } from "../support/csv";

const steps = traffic(DEMO);
const rows = sampled(steps, 500);
const row = (step: Step) => `${(step.at * 1e-9).toFixed(9)},${step.scl},${step.sda}`;
const good = rows.map(row);
const HEADER = "Time [s],SCL,SDA\n";
const text = (lines: readonly string[]) => `${HEADER}${lines.join("\n")}\n`;

interface Bad {
  readonly name: string;
  readonly content: string | Uint8Array;
  readonly code: string;
  readonly words: RegExp;
  readonly place?: { readonly line?: number; readonly byte?: number };
  readonly choices?: ReadChoices;
}

const bytes = (...parts: (string | number[])[]) =>
  Uint8Array.from(parts.flatMap((part) => (typeof part === "string" ? [...part].map((letter) => letter.charCodeAt(0)) : part)));

const REFUSED: readonly Bad[] = [
  { name: "empty file", content: "", code: "empty-file", words: /is empty: it has 0 bytes/, place: { byte: 0 } },
  { name: "blank lines only", content: "\n\n  \n", code: "empty-file", words: /only blank lines/ },
  { name: "PDF", content: bytes("%PDF-1.7\n", [0xe2, 0xe3, 0]), code: "pdf-file", words: /a PDF document/ },
  { name: "PNG", content: bytes([0x89], "PNG\r\n", [0x1a, 10, 0, 0]), code: "image-file", words: /a PNG picture/ },
  { name: "JPEG", content: bytes([0xff, 0xd8, 0xff, 0xe0, 0]), code: "image-file", words: /a JPEG picture/ },
  {
    name: "workbook",
    content: bytes("PK", [3, 4, 20, 0], "xl/workbook.xml"),
    code: "spreadsheet-file",
    words: /spreadsheet workbook/,
  },
  { name: "ZIP", content: bytes("PK", [3, 4, 20, 0], "capture.csv"), code: "zip-file", words: /ZIP archive/ },
  { name: "bzip2", content: bytes("BZh91AY", [0, 1, 2]), code: "compressed-file", words: /bzip2/ },
  {
    name: "binary dump",
    content: bytes("abc", [0, 1, 2, 3, 250, 7, 9, 9, 9]),
    code: "binary-file",
    words: /byte 3 is 00 hex/,
    place: { byte: 3 },
  },
  {
    name: "binary after text",
    content: bytes("1,2,3\n", [7, 8]),
    code: "binary-file",
    words: /byte 6 is 07 hex/,
    place: { byte: 6 },
  },
  { name: "web page", content: "<!DOCTYPE html><html><body>Sign in</body></html>", code: "html-file", words: /web page/ },
  { name: "XML", content: '<?xml version="1.0"?><a/>', code: "xml-file", words: /XML/ },
  { name: "JSON", content: '{"samples":[1,0,1]}', code: "json-file", words: /JSON/ },
  { name: "JSON list", content: "[[0,1],[1,0]]", code: "json-file", words: /JSON/ },
  {
    name: "log text",
    content: "boot ok\n[12:00:01] i2c: arbitration lost\nretry\n",
    code: "no-readings",
    words: /line 1 reads "boot ok"/,
    place: { line: 1 },
  },
  {
    name: "header without rows",
    content: HEADER,
    code: "no-readings",
    words: /line 1 reads "Time \[s\],SCL,SDA"/,
    place: { line: 1 },
  },
  {
    name: "grouped thousands",
    content: "Time;SCL;SDA\n1.234.567,5;0;1\n1.234.568,5;1;1\n",
    code: "ambiguous-number",
    words: /1\.234\.567,5/,
    place: { line: 2 },
  },
  {
    name: "comma that may group",
    content: "Time [us];SCL;SDA\n1,000;1;1\n2,000;0;1\n3,000;1;0\n",
    code: "ambiguous-number",
    words: /the number 1,000/,
    place: { line: 2 },
  },
  {
    name: "point or comma that may group, seen late",
    content: "Time (ns);SCL;SDA\n800;1;1\n1,000;1;1\n1,200;0;1\n",
    code: "ambiguous-number",
    words: /mark in the number 1,000 in line 3 is ambiguous/,
    place: { line: 3 },
  },
  {
    name: "time that runs backwards, by its name",
    content: `Time,SCL,SDA\n${[...rows]
      .reverse()
      .map((s) => `${s.at},${s.scl},${s.sda}`)
      .join("\n")}\n`,
    code: "time-runs-backwards",
    words: /^The column "Time" holds times that decrease from row to row: line 3 reads \d+ after \d+\.$/,
    place: { line: 3 },
  },
  {
    name: "time that runs backwards, by its unit",
    content: text([...good].reverse()),
    code: "time-runs-backwards",
    words: /line 3 reads/,
    place: { line: 3 },
  },
  {
    name: "one channel",
    content: `Time [s],SCL\n${rows.map((s) => `${s.at * 1e-9},${s.scl}`).join("\n")}\n`,
    code: "one-channel",
    words: /Only one channel/,
  },
  {
    name: "flat lines",
    content: text(rows.map((s) => row({ ...s, scl: 1, sda: 1 }))),
    code: "no-activity",
    words: /No line of this file changes/,
  },
  {
    name: "one line moves",
    content: text(rows.map((s) => row({ ...s, sda: 1 }))).replace("SCL,SDA", "a,b"),
    code: "no-clock",
    words: /Only one line of this file changes/,
  },
  {
    name: "flat volts with noise",
    content: `Time [s],A [V],B [V]\n${rows.map((s, i) => `${(s.at * 1e-9).toFixed(9)},${(3.3 + (i % 5) * 0.004).toFixed(3)},${(3.29 + (i % 7) * 0.003).toFixed(3)}`).join("\n")}\n`,
    code: "no-activity",
    words: /No line of this file changes/,
  },
  {
    name: "every row broken further down",
    content: `${text(good.slice(0, 40))}${"x,y\n".repeat(60)}`,
    code: "too-many-rows-set-aside",
    words: /60 of 100 rows/,
    choices: { scl: "SCL", sda: "SDA" },
  },
  { name: "unknown channel", content: text(good), code: "unknown-channel", words: /CLK/, choices: { scl: "CLK", sda: "SDA" } },
  {
    name: "unknown tap",
    content: text(good),
    code: "channel-unknown",
    words: /tap M1 asks for "nope"/,
    choices: { taps: [{ label: "M1", scl: "nope", sda: null, polarity: "drive" }] },
  },
  { name: "cut-off gzip", content: new Uint8Array(gzipSync(text(good))).slice(0, 900), code: "gzip-broken", words: /ends early/ },
  {
    name: "corrupt gzip",
    content: new Uint8Array(gzipSync(text(good))).map((byte, i) => (i > 400 && i < 440 ? 255 - byte : byte)),
    code: "gzip-broken",
    words: /corrupt/,
  },
];

async function refusal(content: string | Uint8Array, choices: ReadChoices = {}) {
  const opened = await openText(content, choices);
  if (!opened.ok) return opened.problem;
  const result = await opened.value.read({ edges: () => undefined, tap: () => undefined, progress: () => undefined });
  return result.ok ? null : result.problem;
}

describe("refused", () => {
  test.each(REFUSED)("$name", async ({ content, code, words, place, choices }) => {
    const problem = await refusal(content, choices);
    expect(problem).toMatchObject({ code });
    expect(problem?.message).toMatch(words);
    expect(problem?.advice).not.toBe("");
    if (place !== undefined) expect(problem?.place).toMatchObject(place);
  });
});

/** Rows changed at index (0 = first row of readings, line 2). */
function changed(at: number, ...put: string[]): string {
  const lines = [...good];
  lines.splice(at, put.length === 0 ? 1 : put.length, ...put);
  return text(lines);
}

describe("read with warnings", () => {
  const aside: readonly [string, string, { code: string; line: number; count: number }][] = [
    ["a short row", changed(10, "0.000005,1"), { code: "row-set-aside", line: 12, count: 1 }],
    ["a long row", changed(10, `${good[10]},1`), { code: "row-set-aside", line: 12, count: 1 }],
    ["a word among levels", changed(10, "0.000005,maybe,1"), { code: "row-set-aside", line: 12, count: 1 }],
    ["a level of 2", changed(10, "0.000005,2,1"), { code: "row-set-aside", line: 12, count: 1 }],
    ["no time", changed(10, ",1,1"), { code: "row-set-aside", line: 12, count: 1 }],
    ["a time that is a word", changed(10, "later,1,1"), { code: "row-set-aside", line: 12, count: 1 }],
    ["a time going back", changed(10, "0.000001000,1,1"), { code: "time-backwards", line: 12, count: 1 }],
    ["a time repeated", changed(10, good[9]), { code: "time-backwards", line: 12, count: 1 }],
    ["a time far ahead", changed(10, "9.000001000,1,1"), { code: "time-backwards", line: 12, count: 1 }],
    ["two torn rows", changed(10, "0.0000", "0.00005500,"), { code: "row-set-aside", line: 12, count: 2 }],
    ["a footer", `${text(good)}\nEnd of export\n`, { code: "row-set-aside", line: good.length + 3, count: 1 }],
    ["a truncated last row", `${text(good)}0.00`, { code: "row-set-aside", line: good.length + 2, count: 1 }],
    ["a very long line", changed(10, "9".repeat(3_000_000)), { code: "row-set-aside", line: 12, count: 1 }],
  ];
  test.each(aside)("%s", async (_name, content, warning) => {
    const read = await readText(content, { scl: "SCL", sda: "SDA" });
    expect(read.tail.warnings).toEqual([expect.objectContaining(warning)]);
    expect(read.tail.warnings[0].message).toMatch(new RegExp(`[Ll]ines? ${warning.line}\\b`));
    expect(read.tail.rowsSetAside).toBe(warning.count);
    // Idle rows were lost only: every edge is still there and nothing was cut.
    expect(read.tail.sclEdges).toBe(168);
    expect(read.lines.some((lines) => (lines & 16) !== 0)).toBe(false);
  });

  test("rows lost in the middle cut the record", async () => {
    const lines = [...good];
    lines.splice(300, 250);
    const read = await readText(text(lines));
    expect(read.tail.warnings).toEqual([expect.objectContaining({ code: "rows-lost", line: 302, count: 1 })]);
    expect(read.tail.warnings[0].message).toMatch(/about 250 samples are missing, first before line 302/);
    const at = read.lines.findIndex((one) => (one & 16) !== 0);
    expect(read.ticks[at]).toBe(550 * 500_000);
    expect(read.lines.filter((one) => (one & 16) !== 0)).toHaveLength(1);
  });

  test("a change lost from a list of changes cuts it there", async () => {
    const lines = steps.map(row);
    lines[40] = "torn";
    const read = await readText(text(lines));
    expect(read.tail.warnings.map((warning) => warning.code).sort()).toEqual(["row-set-aside", "rows-lost"]);
    expect(read.lines.filter((one) => (one & 16) !== 0)).toHaveLength(1);
  });

  test.each([
    ["near the start", 40],
    ["on the first row", 0],
  ])("one time far ahead in a list of changes costs its own row: %s", async (_name, at) => {
    const lines = steps.map(row);
    lines[at] = lines[at].replace(/^[^,]*/, "9.000000000");
    const read = await readText(text(lines));
    expect(read.tail.warnings.find((warning) => warning.code === "time-backwards")).toMatchObject({ line: at + 2, count: 1 });
    expect(read.tail.samples).toBe(steps.length - 1);
    expect(read.tail.endTick).toBe(steps[steps.length - 1].at * 1000);
    const kept = steps.filter((_, i) => i !== at);
    expect(read.ticks).toEqual(kept.slice(0, read.ticks.length).map((step) => step.at * 1000));
    expect(read.lines.filter((one) => (one & 16) !== 0)).toHaveLength(at === 0 ? 0 : 1);
    expect(read.capture.head.startTick).toBe(kept[0].at * 1000);
  });

  test("one time going back in a list of changes costs its own row", async () => {
    const lines = steps.map(row);
    lines[40] = lines[40].replace(/^[^,]*/, ((steps[38].at + 1) * 1e-9).toFixed(9));
    const read = await readText(text(lines));
    expect(read.tail.warnings.find((warning) => warning.code === "time-backwards")).toMatchObject({ line: 42, count: 1 });
    expect(read.tail.samples).toBe(steps.length - 1);
  });

  test("many kinds at once are counted one by one", async () => {
    const lines = [...good];
    lines[5] = "a,b,c";
    lines[8] = "0.1";
    lines[9] = "0.2";
    const read = await readText(text(lines), { scl: "SCL", sda: "SDA" });
    expect(read.tail.warnings).toEqual([
      expect.objectContaining({ code: "row-set-aside", line: 7, count: 1 }),
      expect.objectContaining({ code: "row-set-aside", line: 10, count: 2 }),
    ]);
    expect(read.tail.samples).toBe(good.length - 3);
  });
});
