// RFC 4180 section 2, rule by rule (informational RFC, October 2005), and the papaparse path's own duties.

import { describe, expect, test } from "vitest";
import { splitText } from "../../lib/engine/samples/csv/split";
import { DEMO, openText, readText, sampled, traffic } from "../support/csv";

const steps = sampled(traffic(DEMO), 1000);
const rows = steps.map((step) => [(step.at * 1e-9).toFixed(9), String(step.scl), String(step.sda)]);
const build = (end: string, last: string) => `Time [s],SCL,SDA${end}${rows.map((row) => row.join(",")).join(end)}${last}`;

describe("RFC 4180 section 2", () => {
  test("rules 1 and 2: records end in CRLF; the last one may lack it", async () => {
    const whole = await readText(build("\r\n", "\r\n"));
    const bare = await readText(build("\r\n", ""));
    expect(bare.ticks).toEqual(whole.ticks);
    expect(bare.tail).toEqual(whole.tail);
    expect(whole.tail.samples).toBe(rows.length);
  });

  test("rule 3: the header line may be there or not", async () => {
    const text = build("\r\n", "\r\n");
    const bare = await readText(text.slice(text.indexOf("\n") + 1));
    expect(bare.ticks).toEqual((await readText(text)).ticks);
  });

  test("rule 4: every line has the same number of fields; spaces belong to a field", async () => {
    expect(splitText("a, b ,c\n", ",", false).rows).toEqual([["a", " b ", "c"]]);
    const lines = build("\n", "\n").split("\n");
    lines[30] = `${lines[30]},9`;
    const read = await readText(lines.join("\n"));
    expect(read.tail.warnings).toEqual([expect.objectContaining({ code: "row-set-aside", line: 31, count: 1 })]);
  });

  test("rules 5 to 7: quoted fields, line breaks, delimiters and doubled quotes inside them", async () => {
    expect(splitText('"aaa","b\nbb","c""c"\nzzz,"y,y",xxx\n', ",", false).rows).toEqual([
      ["aaa", "b\nbb", 'c"c'],
      ["zzz", "y,y", "xxx"],
    ]);
  });

  test("quoted bodies are read whole, with line numbers of the file", async () => {
    const quoted = rows.map((row) => row.map((cell) => `"${cell}"`).join(","));
    quoted[40] = '"broken","1","0"';
    const read = await readText(
      `"Time [s]","SCL","SDA","a note\nof two lines"\n${quoted.map((row) => `${row},"x\ny"`).join("\n")}\n`,
      { scl: "SCL", sda: "SDA" },
    );
    // Header: lines 1-2; every row takes two lines.
    expect(read.tail.warnings).toEqual([expect.objectContaining({ code: "row-set-aside", line: 3 + 40 * 2 })]);
    expect(read.tail.samples).toBe(rows.length - 1);
  });

  test("decimal commas inside quotes, comma as delimiter", async () => {
    const read = await readText(
      `Time [s],SCL [V],SDA [V]\n${steps.map((s) => `"${(s.at * 1e-9).toFixed(9).replace(".", ",")}","${s.scl === 1 ? "3,30" : "0,10"}","${s.sda === 1 ? "3,30" : "0,10"}"`).join("\n")}\n`,
    );
    expect(read.capture.head.vdd_v).toBeCloseTo(3.3, 6);
    expect(read.tail.sclEdges).toBe(168);
  });

  test("a quote that never closes costs its own line only", async () => {
    const quoted = rows.map((row) => row.map((cell) => `"${cell}"`).join(","));
    quoted[50] = quoted[50].replace(/"$/, "");
    const read = await readText(`"Time [s]","SCL","SDA"\n${quoted.join("\n")}\n`, { scl: "SCL", sda: "SDA" });
    expect(read.tail.warnings[0]).toMatchObject({ code: "row-set-aside", line: 52 });
    expect(read.tail.samples).toBeGreaterThan(rows.length - 4);
  });

  test("quotes far down a plain body are understood where they stand", async () => {
    const lines = build("\n", "\n").split("\n");
    lines[400] = rows[399].map((cell) => `"${cell}"`).join(",");
    const read = await readText(lines.join("\n"));
    expect(read.tail.rowsSetAside).toBe(0);
    expect(read.tail.samples).toBe(rows.length);
  });
});

test("channels that are named twice are refused by name and found by number", async () => {
  const text = build("\n", "\n").replace("SCL,SDA", "In,In");
  const opened = await openText(text, { scl: "In", sda: "@3" });
  expect(opened.ok).toBe(false);
  expect((await readText(text, { scl: "@2", sda: "@3" })).tail.sclEdges).toBe(168);
});
