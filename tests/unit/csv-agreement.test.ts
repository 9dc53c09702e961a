// The fast paths, the general scanner and papaparse read the same file to the same edges, wherever its chunks are cut.

import fc from "fast-check";
import { describe, expect, test } from "vitest";
import type { Result } from "../../lib/base/result";
import { type OpenedCsv, openCsv } from "../../lib/engine/samples/csv";
import type { EdgeBlock } from "../../lib/engine/samples/edges";
import type { CaptureTail, EdgeSink, ReadChoices } from "../../lib/engine/samples/reader";
import { type Step, sampled, source, traffic } from "../support/csv";

interface Outcome {
  readonly ticks: number[];
  readonly lines: number[];
  readonly leads: number[];
  readonly means: number[];
  readonly tail: unknown;
}

async function outcome(read: (sink: EdgeSink) => Promise<Result<CaptureTail>>, passing = false): Promise<Outcome> {
  const found: { ticks: number[]; lines: number[]; leads: number[]; means: number[] } = {
    ticks: [],
    lines: [],
    leads: [],
    means: [],
  };
  const result = await read({
    passing,
    edges(block: EdgeBlock) {
      found.ticks.push(...block.ticks);
      found.lines.push(...block.lines);
      if (block.volts !== null) {
        found.leads.push(...block.volts.leadScl, ...block.volts.leadSda);
        found.means.push(...block.volts.meanScl, ...block.volts.meanSda);
      }
    },
    tap: () => undefined,
    progress: () => undefined,
  });
  // Blocks of volts are cut where chunks end, so the columns are compared as sorted wholes.
  found.leads.sort();
  found.means.sort();
  return { ...found, tail: result };
}

async function opened(text: string, cuts: readonly number[], choices: ReadChoices): Promise<OpenedCsv> {
  const result = await openCsv(source(text, "capture.csv", cuts), choices, false);
  if (!result.ok) throw new Error(`${result.problem.code}: ${result.problem.message}`);
  return result.value;
}

/** The same table with every cell in quotes goes through papaparse. */
function quotedForm(text: string): string {
  const [header, ...rows] = text.split(/(?<=\n)/);
  return header + rows.map((row) => row.replace(/[^,\r\n]+/g, (cell) => `"${cell}"`)).join("");
}

async function agree(text: string, cuts: readonly number[]): Promise<void> {
  const choices = { scl: "@2", sda: "@3" };
  const whole = await opened(text, [], choices);
  const cut = await opened(text, cuts, choices);
  const general = await outcome((sink) => whole.readGeneral(sink));
  expect(await outcome((sink) => whole.read(sink))).toEqual(general);
  expect(await outcome((sink) => whole.read(sink), true)).toEqual(general);
  expect(await outcome((sink) => cut.read(sink))).toEqual(general);
  expect(await outcome((sink) => cut.readGeneral(sink))).toEqual(general);
  const quoted = await opened(quotedForm(text), cuts, choices);
  expect(quoted.view.layout.dialect.quoted).toBe(true);
  expect(await outcome((sink) => quoted.read(sink))).toEqual(general);
}

const frames = fc.array(fc.array(fc.integer({ min: 0, max: 255 }), { minLength: 1, maxLength: 3 }), {
  minLength: 2,
  maxLength: 4,
});
const cutting = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 12 });
const ends = fc.constantFrom("\n", "\r\n");

function positions(text: string, shares: readonly number[]): number[] {
  return shares.map((share) => Math.floor(share * text.length)).sort((a, b) => a - b);
}

/** Blemishes that a real export may carry; each replaces one row. */
const BLEMISHES = [
  (row: string) => row.replace(/,[^,]*$/, ""),
  (row: string) => `${row},7`,
  (row: string) => row.replace(/,[^,]*$/, ",abc"),
  (row: string) => row.replace(/,[^,]*$/, ",NaN"),
  (row: string) => row.replace(/,/g, ", "),
  () => "",
  (row: string) => row.replace(/^[^,]*/, "?!"),
  (row: string) => row.replace(/^[^,]*/, "-1.0"),
  (row: string) => row.replace(/^[^,]*/, "7.5"),
  (row: string) => `+${row}`,
  (row: string) => row.replace(/^([^,]*)/, "$1e0"),
];

function blemished(rows: string[], where: readonly { readonly at: number; readonly kind: number }[]): string[] {
  const out = [...rows];
  for (const { at, kind } of where) {
    const index = Math.floor(at * out.length);
    out[index] = BLEMISHES[kind % BLEMISHES.length](out[index]);
  }
  return out;
}

const blemishes = fc.array(
  fc.record({ at: fc.double({ min: 0.2, max: 1, noNaN: true, maxExcluded: true }), kind: fc.nat(100) }),
  { maxLength: 6 },
);

test("blocks for a passing sink hold until two more were handed on", async () => {
  // Enough changes for many blocks.
  const rows = Array.from({ length: 120_000 }, (_, i) => `${(i * 1e-6).toFixed(6)},${i & 1},${(i >> 1) & 1}`);
  const whole = await opened(`Time [s],SCL,SDA\n${rows.join("\n")}\n`, [], { scl: "@2", sda: "@3" });
  const seen: { block: EdgeBlock; ticks: number[] }[] = [];
  await whole.read({
    passing: true,
    edges(block) {
      const before = seen[seen.length - 1];
      if (before !== undefined) expect([...before.block.ticks]).toEqual(before.ticks);
      seen.push({ block, ticks: [...block.ticks] });
    },
    tap: () => undefined,
    progress: () => undefined,
  });
  expect(seen.length).toBeGreaterThan(6);
  expect(seen.flatMap((one) => one.ticks)).toEqual(rows.map((_, i) => i * 1_000_000));
  expect(new Set(seen.map((one) => one.block.ticks.buffer)).size).toBe(3);
});

describe("three ways of reading agree", () => {
  const shapes: readonly [string, number | null, (step: Step) => string][] = [
    ["uniform levels", 1000, (s) => `${(s.at * 1e-9).toFixed(9)},${s.scl},${s.sda}`],
    ["changes only", null, (s) => `${(s.at * 1e-9).toFixed(9)},${s.scl},${s.sda}`],
    ["uniform levels from before the trigger", 1000, (s) => `${((s.at - 300_000) * 1e-9).toFixed(7)},${s.scl},${s.sda}`],
    ["levels at times of many decimals", 1000, (s) => `${((s.at - 3e5) * 1e-9).toFixed(12)},${s.scl},${s.sda}`],
    ["levels at times of few digits", null, (s) => `${Number((s.at * 1e-9).toFixed(9))},${s.scl},${s.sda}`],
    ["changes at times with exponents", null, (s) => `${(s.at * 1e-9).toExponential()},${s.scl},${s.sda}`],
    ["levels after blanks", 1000, (s) => `${(s.at * 1e-9).toFixed(6)}, ${s.scl}, ${s.sda}`],
    ["levels as letters", 1000, (s) => `${(s.at * 1e-9).toFixed(6)},${"LH"[s.scl]},${"lh"[s.sda]}`],
    ["levels before an empty column", 1000, (s) => `${(s.at * 1e-9).toFixed(6)},${s.scl},${s.sda},`],
  ];
  test.each(shapes)("%s", async (_name, interval, row) => {
    await fc.assert(
      fc.asyncProperty(frames, cutting, ends, blemishes, async (bytes, shares, end, where) => {
        const steps = traffic(bytes);
        const rows = blemished((interval === null ? steps : sampled(steps, interval)).map(row), where);
        const text = `Time [s],SCL,SDA${end}${rows.join(end)}${end}`;
        await agree(text, positions(text, shares));
      }),
      { numRuns: 12 },
    );
  });

  const volts: readonly [string, (at: number, v: number, w: number) => string][] = [
    ["volts", (at, v, w) => `${(at * 1e-9).toFixed(9)},${v.toFixed(3)},${w.toFixed(3)}`],
    ["volts with exponents", (at, v, w) => `${(at * 1e-9).toExponential(9)},${v.toExponential(5)},${w.toExponential(5)}`],
    [
      "volts about zero with many decimals",
      (at, v, w) => `${((at - 1e5) * 1e-9).toFixed(8)},${(v - 1.65).toFixed(6)},${(w - 1.65).toFixed(2)}`,
    ],
    ["millivolts in whole numbers", (at, v, w) => `${(at * 1e-9).toFixed(9)},${Math.round(v * 1000)},${Math.round(w * 1000)}`],
    [
      "volts of more digits than fit 32 bits",
      (at, v, w) => `${((at - 1e5) * 1e-9).toFixed(13)},${(v - 1.65).toFixed(12)},${(w * 1e10).toFixed(0)}e-10`,
    ],
    [
      "volts in trimmed numbers",
      (at, v, w) => `${Number((at * 1e-9).toFixed(9))},${Number(v.toFixed(3))},${Number(w.toFixed(2))}`,
    ],
    [
      "volts at whole microseconds and longer",
      (at, v, w) => `${(at * 1e-9).toFixed(12)},${v.toFixed(9)},${Math.round(w * 100) / 100}`,
    ],
  ];
  test.each(volts)("%s", async (_name, row) => {
    await fc.assert(
      fc.asyncProperty(frames, cutting, ends, blemishes, fc.nat(1000), async (bytes, shares, end, where, seed) => {
        let v = 3.3;
        let w = 3.3;
        let state = seed + 1;
        const noise = () => {
          state = (Math.imul(state, 48_271) >>> 0) % 2_147_483_647;
          return ((state % 1000) / 1000 - 0.5) * 0.05;
        };
        const rows = sampled(traffic(bytes), 500).map((step) => {
          v += ((step.scl === 1 ? 3.3 : 0.1) - v) * 0.6;
          w += ((step.sda === 1 ? 3.3 : 0.15) - w) * 0.6;
          return row(step.at, v + noise(), w + noise());
        });
        const text = `Time [s],SCL [V],SDA [V]${end}${blemished(rows, where).join(end)}${end}`;
        await agree(text, positions(text, shares));
      }),
      { numRuns: 12 },
    );
  });
});
