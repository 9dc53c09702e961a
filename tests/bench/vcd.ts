// Goal 4: reading a VCD in which 20 unrelated signals change beside SCL and SDA, against a plain newline count of the same
// file in the same run. The file is written once, seeded, into the ignored data folder.

import { existsSync } from "node:fs";
import { mkdir, open, rename } from "node:fs/promises";
import { openVcd } from "../../lib/engine/samples/vcd";
import { pathSource } from "../../workers/path-source";
import { interleaved, type Row, type Suite } from "./measure";

const FOLDER = new URL("../../.firstlow/bench/", import.meta.url).pathname;
const BYTES = Number(process.env.FIRSTLOW_BENCH_MB ?? 64) * 1_000_000;
const ROUNDS = Number(process.env.FIRSTLOW_BENCH_ROUNDS ?? 5);
const OTHERS = 20;

/** Text of the dump, piece by piece: bus traffic, and between two edges of it some changes of the other signals. */
class Dump {
  tick = 0;
  edges = 0;
  parts: string[] = [];
  private seed = 1;
  private levels = new Uint8Array(OTHERS);
  private scl = 1;
  private sda = 1;
  private readonly codes = Array.from({ length: OTHERS }, (_, i) =>
    i < 10 ? String.fromCharCode(35 + i) : `a${String.fromCharCode(40 + i)}`,
  );

  header(): string {
    const vector = (i: number) => i % 5 === 4;
    const variables = this.codes.map((code, i) =>
      vector(i) ? `$var wire 8 ${code} v${i} [7:0] $end` : `$var wire 1 ${code} n${i} $end`,
    );
    const values = this.codes.map((code, i) => (vector(i) ? `b0 ${code}` : `0${code}`));
    return [
      "$timescale 1 ns $end\n$scope module top $end",
      '$var wire 1 ! SCL $end\n$var wire 1 " SDA $end',
      ...variables,
      '$upscope $end\n$enddefinitions $end\n#0\n$dumpvars\n1!\n1"',
      ...values,
      "$end\n",
    ].join("\n");
  }

  message(): void {
    this.line('"', 0);
    this.line("!", 0);
    for (let byte = 0; byte < 4; byte++) {
      const value = byte === 0 ? 0xa0 : this.random(256);
      for (let bit = 7; bit >= -1; bit--) {
        this.line('"', bit < 0 ? 0 : (value >> bit) & 1);
        this.line("!", 1);
        this.line("!", 0);
      }
    }
    this.line('"', 0);
    this.line("!", 1);
    this.line('"', 1);
  }

  private random(below: number): number {
    this.seed = (Math.imul(this.seed, 1664525) + 1013904223) >>> 0;
    return Math.floor((this.seed / 2 ** 32) * below);
  }

  private line(code: string, level: number): void {
    for (let n = 2 + this.random(5); n > 0; n--) this.others();
    if ((code === "!" ? this.scl : this.sda) === level) return;
    if (code === "!") this.scl = level;
    else this.sda = level;
    this.tick += 1 + this.random(50);
    this.edges++;
    this.parts.push(`#${this.tick}\n${level}${code}\n`);
  }

  private others(): void {
    this.tick += 1 + this.random(90);
    let text = `#${this.tick}\n`;
    for (let n = 1 + this.random(3); n > 0; n--) {
      const i = this.random(OTHERS);
      this.levels[i] ^= 1;
      text += i % 5 === 4 ? `b${this.random(256).toString(2)} ${this.codes[i]}\n` : `${this.levels[i]}${this.codes[i]}\n`;
    }
    this.parts.push(text);
  }
}

async function benchFile(): Promise<string> {
  const path = `${FOLDER}others-${BYTES}.vcd`;
  if (existsSync(path)) return path;
  await mkdir(FOLDER, { recursive: true });
  const file = await open(`${path}.part`, "w");
  const dump = new Dump();
  let bytes = 0;
  dump.parts.push(dump.header());
  while (bytes < BYTES) {
    for (let i = 0; i < 200; i++) dump.message();
    const text = dump.parts.join("");
    dump.parts = [];
    bytes += text.length;
    await file.write(text, null, "latin1");
  }
  await file.close();
  await rename(`${path}.part`, path);
  return path;
}

async function newlines(path: string): Promise<void> {
  let count = 0;
  for await (const chunk of (await pathSource(path)).open()) {
    for (let i = 0; i < chunk.length; i++) if (chunk[i] === 10) count++;
  }
  if (count === 0) throw new Error("no lines");
}

async function read(path: string): Promise<void> {
  const opened = await openVcd(await pathSource(path), {}, false);
  if (!opened.ok) throw new Error(opened.problem.message);
  let edges = 0;
  const sink = {
    edges: (block: { length: number }) => {
      edges += block.length;
    },
    tap: () => undefined,
    progress: () => undefined,
  };
  const tail = await opened.value.read(sink);
  if (!tail.ok || edges < 10_000) throw new Error("the capture was not read");
}

export const suite: Suite = {
  name: "vcd",
  async run(): Promise<Row[]> {
    const path = await benchFile();
    const times = await interleaved(
      [
        { name: "newlines", run: () => newlines(path) },
        { name: "read", run: () => read(path) },
      ],
      ROUNDS,
    );
    const baselineMs = times.get("newlines") ?? Number.NaN;
    const row: Row = {
      goal: "4",
      what: "VCD with 20 unrelated signals, open and read",
      ms: times.get("read") ?? Number.NaN,
      baseline: "a newline count",
      baselineMs,
      sense: "at most",
      limit: 2,
    };
    return [row];
  },
};
