// CSV reading in Node against a plain newline count and papaparse's settings, on the same files in the same run.

import { closeSync, createReadStream, openSync, readSync } from "node:fs";
import Papa from "papaparse";
import { type OpenedCsv, openCsv } from "../../lib/engine/samples/csv";
import type { EdgeSink } from "../../lib/engine/samples/reader";
import { pathSource } from "../../workers/path-source";
import { benchFile } from "./csv-data";
import { type Case, interleaved, type Row, type Suite } from "./measure";

const ROUNDS = Number(process.env.FIRSTLOW_BENCH_ROUNDS ?? 5);

function newlines(path: string): void {
  const file = openSync(path, "r");
  const buffer = new Uint8Array(4 * 1024 * 1024);
  let count = 0;
  for (;;) {
    const read = readSync(file, buffer, 0, buffer.length, null);
    if (read === 0) break;
    for (let i = 0; i < read; i += 1) if (buffer[i] === 10) count += 1;
  }
  closeSync(file);
  if (count === 0) throw new Error("no lines");
}

/** papaparse over a Node stream of 64 KB chunks, its fastest size here, taking the edges out of its rows. */
function papa(path: string, keyed: boolean): Promise<void> {
  return new Promise((resolve, reject) => {
    let edges = 0;
    let last = "";
    const stream = createReadStream(path, { highWaterMark: 65_536, encoding: "latin1" });
    Papa.parse<string[] | Record<string, unknown>>(stream, {
      header: keyed,
      dynamicTyping: keyed,
      chunk(results) {
        for (const row of results.data) {
          const levels = Array.isArray(row) ? `${row[1]}${row[2]}` : `${Object.values(row)[1]}${Object.values(row)[2]}`;
          if (levels !== last) edges += 1;
          last = levels;
        }
      },
      complete: () => (edges > 0 ? resolve() : reject(new Error("no edges"))),
      error: reject,
    });
  });
}

async function opened(path: string): Promise<OpenedCsv> {
  const found = await openCsv(await pathSource(path), {}, false);
  if (!found.ok) throw new Error(found.problem.message);
  return found.value;
}

async function ours(capture: OpenedCsv, fast: boolean): Promise<void> {
  let edges = 0;
  const sink: EdgeSink = {
    passing: true,
    edges: (block) => {
      edges += block.length;
    },
    tap: () => undefined,
    progress: () => undefined,
  };
  const result = await (fast ? capture.read(sink) : capture.readGeneral(sink));
  if (!result.ok || edges < 1000) throw new Error("the capture was not read");
}

async function fileRows(kind: "digital" | "changes" | "plain" | "scientific"): Promise<Row[]> {
  const path = await benchFile(kind);
  const digital = kind === "digital" || kind === "changes";
  // Opening (dialect, levels, channels) looks at the first megabyte whatever the file's size, so it is done once.
  const capture = await opened(path);
  const cases: Case[] = [
    { name: "newlines", run: () => newlines(path) },
    { name: "general", run: () => ours(capture, false) },
    { name: "fast", run: () => ours(capture, true) },
  ];
  const slow: Case[] = [
    { name: "papa", run: () => papa(path, false) },
    { name: "keyed", run: () => papa(path, true) },
  ];
  const times = await interleaved(cases, ROUNDS);
  const rivals = await interleaved([...slow, ...cases.slice(1)], Math.max(1, Math.ceil(ROUNDS / 3)));
  const at = (map: Map<string, number>, name: string) => map.get(name) ?? Number.NaN;
  const most = (goal: string, what: string, name: string, limit: number): Row => ({
    goal,
    what: `${what}, ${kind}`,
    ms: at(times, name),
    baseline: "a newline count",
    baselineMs: at(times, "newlines"),
    sense: "at most",
    limit,
  });
  const least = (what: string, name: string, rival: string, baseline: string, limit: number): Row => ({
    goal: "3",
    what: `${what}, ${kind}`,
    ms: at(rivals, name),
    baseline,
    baselineMs: at(rivals, rival),
    sense: "at least",
    limit,
  });
  return [
    most("1", "any shape", "general", digital ? 3 : 2),
    most("2", "regular rows", "fast", 1.8),
    least("any shape", "general", "papa", "papaparse (arrays, untyped, 64 KB)", 4),
    ...(digital ? [least("regular rows", "fast", "papa", "papaparse (arrays, untyped, 64 KB)", 8)] : []),
    least("regular rows", "fast", "keyed", "papaparse (header, dynamicTyping)", 12),
  ];
}

export const suite: Suite = {
  name: "csv",
  async run() {
    const rows: Row[] = [];
    for (const kind of ["digital", "changes", "plain", "scientific"] as const) rows.push(...(await fileRows(kind)));
    return rows;
  },
};
