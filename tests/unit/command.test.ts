import { spawn } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { afterAll, describe, expect, test } from "vitest";
import { ReportSchema } from "@/lib/diagnosis/report";
import { readOptions, UsageError } from "@/workers/decode/options";
import { LineScript } from "../support/line-script";

const folder = mkdtempSync(join(tmpdir(), "firstlow-command-"));
afterAll(() => rmSync(folder, { recursive: true }));

function file(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

interface Ended {
  code: number | null;
  out: string;
  err: string;
}

/** The command as README says, without npm around it. */
function decode(...words: string[]): Promise<Ended> {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, ["--import", "tsx", "workers/decode.command.ts", ...words], {
      cwd: new URL("../..", import.meta.url),
    });
    const ended: Ended = { code: null, out: "", err: "" };
    child.stdout.on("data", (data) => {
      ended.out += data;
    });
    child.stderr.on("data", (data) => {
      ended.err += data;
    });
    child.on("close", (code) => resolve({ ...ended, code }));
  });
}

const clean = new LineScript().write(0xa0, 1, 2);
const faulty = new LineScript().start().byte(0x90, false).stop();

test("exit 0 and a valid report: a clean VCD, and the same as CSV compressed", async () => {
  const vcd = await decode(file("clean.vcd", clean.vcd()), "--json");
  expect([vcd.code, vcd.err]).toEqual([0, ""]);
  const report = ReportSchema.parse(JSON.parse(vcd.out));
  expect(report).toMatchObject({
    verdict: "pass",
    limits: { profile: "Standard-mode", source: "UM10204" },
    capture: { format: "vcd", scl: "top.SCL" },
  });
  expect(report.transactions[0].bytes.map((byte) => byte.value)).toEqual([1, 2]);
  const csv = await decode(file("clean.csv.gz", gzipSync(clean.csv())), "--json", "--scl", "SCL", "--sda", "@3");
  expect([csv.code, csv.err]).toEqual([0, ""]);
  const other = ReportSchema.parse(JSON.parse(csv.out));
  expect(other.capture).toMatchObject({ format: "csv", scl: "SCL", sda: "SDA", sample_interval_s: 1e-7 });
  expect(other.transactions[0].bytes.map((byte) => byte.value)).toEqual([1, 2]);
});

test("exit 1 and a text to read: something failed", async () => {
  const { code, out } = await decode(file("faulty.vcd", faulty.vcd()));
  expect(code).toBe(1);
  expect(out).toContain("Address not acknowledged");
  expect(out).toMatch(/tLOW .*>= 4\.7 µs +pass +UM10204/);
  expect(out).toContain("Verdict: fail (Standard-mode");
});

test("limits, roster and log are read from files, and a profile's name stands in the report", async () => {
  const limits = file(
    "line.json",
    JSON.stringify({
      format: "firstlow.limits/1",
      name: "Line 2",
      version: 4,
      base: "Standard-mode",
      limits: { tBUF: { min: 99_000 } },
    }),
  );
  const roster = file("roster.csv", "role,name,address_7bit\ntarget,Probe,0x50\n");
  const log = file("log.txt", "0.001 C1: ok\n");
  const twice = file("twice.vcd", new LineScript().write(0xa0, 1).write(0xa0, 2).vcd());
  const { code, out, err } = await decode(twice, "--json", "--limits", limits, "--roster", roster, "--log", log);
  expect([code, err]).toEqual([1, ""]);
  expect(JSON.parse(out)).toMatchObject({
    limits: { profile: "Line 2", version: 4, base: "Standard-mode" },
    violations: [{ parameter: "tBUF", limit_s: 99e-6 }],
  });
});

test("exit 2: wrong use, with the usage on standard error and nothing on standard output", async () => {
  const none = await decode();
  expect([none.code, none.out]).toEqual([2, ""]);
  expect(none.err).toContain("No file is named.");
  expect(none.err).toContain("usage: npm run --silent decode -- FILE");
  const name = await decode(file("again.vcd", clean.vcd()), "--limits", "Turbo-mode");
  expect([name.code, name.out]).toEqual([2, ""]);
  expect(name.err).toContain('"Turbo-mode" is neither a file nor one of: Standard-mode');
});

test("exit 3: no such file", async () => {
  const { code, out, err } = await decode(join(folder, "absent.csv"), "--json");
  expect([code, out]).toEqual([3, ""]);
  expect(err).toContain("absent.csv: there is no such file. Expected");
});

test("exit 3: a file that is no capture, and a roster with a mistake in it", async () => {
  const log = await decode(file("notes.csv", "hello\nthis is a log\nof nothing\n"));
  expect([log.code, log.out]).toEqual([3, ""]);
  expect(log.err).toContain("notes.csv");
  const roster = await decode(file("ok.vcd", clean.vcd()), "--roster", file("bad.csv", "name,role\nProbe,boss\n"));
  expect(roster.code).toBe(3);
  expect(roster.err).toMatch(/bad\.csv, line 2: .*boss.*Expected controller or target/);
});

test("a reader that goes away is no error", async () => {
  const bus = new LineScript();
  for (let i = 0; i < 2000; i++) bus.write(0xa0, i & 0xff, 7);
  const path = file("long.vcd", bus.vcd());
  const code = await new Promise((resolve) => {
    const child = spawn(process.execPath, ["--import", "tsx", "workers/decode.command.ts", path, "--json"], {
      cwd: new URL("../..", import.meta.url),
    });
    let err = "";
    child.stderr.on("data", (data) => {
      err += data;
    });
    child.stdout.once("data", () => child.stdout.destroy());
    child.on("close", (ended) => resolve(`${ended} ${err}`));
  });
  expect(code).toBe("0 ");
});

describe("options", () => {
  test.each([
    [["a", "b"], /one too many/],
    [["a", "--frobnicate"], /frobnicate/],
    [["a", "--json", "--text"], /exclude each other/],
    [["a", "--scl", "x"], /belong together/],
    [["a", "--scl", "x", "--sda", "x"], /same channel/],
    [["a", "--interval", "0"], /--interval needs a number above 0/],
    [["a", "--interval=-1"], /--interval needs a number above 0/],
    [["a", "--interval", "1us"], /not "1us"/],
    [["a", "--vdd", ""], /--vdd needs/],
    [["a", "--vil", "2", "--vih", "1"], /--vil must be below/],
    [["a", "--cb", "500"], /up to 400 pF/],
    [["a", "--tap", "M1"], /LABEL=SCLNAME,SDANAME/],
    [["a", "--tap", "M1=a"], /LABEL=SCLNAME,SDANAME/],
    [["a", "--tap", "M1=a,b,c"], /LABEL=SCLNAME,SDANAME/],
    [["a", "--tap", "M1=-,-"], /names no channel/],
    [["a", "--tap", "M1=a,b", "--tap", "M1=c,d"], /given twice/],
    [["a", "--tap", "M1=a,b", "--tap-polarity", "M1=up"], /LABEL=drive/],
    [["a", "--tap-polarity", "M1=drive"], /"M1", which is no tap/],
    [["a", "--limits"], /limits/],
  ])("%j is wrong use", (words, message) => {
    expect(() => readOptions(words)).toThrow(UsageError);
    expect(() => readOptions(words)).toThrow(message);
  });

  test("all of them at once", () => {
    const words =
      "x.csv --scl a --sda b --tap M1=c,- --tap M2=d,e --tap-polarity M2=drive --interval 1e-7 --vdd 3.3 --vil 1 --vih 2.3 --cb 250 --json";
    expect(readOptions([...words.split(" "), "--limits", "SMBus 3 1 MHz"])).toEqual({
      file: "x.csv",
      scl: "a",
      sda: "b",
      taps: [
        { label: "M1", scl: "c", sda: null, polarity: "release" },
        { label: "M2", scl: "d", sda: "e", polarity: "drive" },
      ],
      interval_s: 1e-7,
      vdd_v: 3.3,
      vil_v: 1,
      vih_v: 2.3,
      limits: "SMBus 3 1 MHz",
      cb_pf: 250,
      roster: null,
      log: null,
      json: true,
    });
    expect(readOptions(["--help"])).toBeNull();
  });
});
