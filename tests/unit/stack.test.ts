// The start and test commands' own rules: who holds a folder, which port, what counts as passed.

import { spawn } from "node:child_process";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import net from "node:net";
import { tmpdir } from "node:os";
import path from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { takeLock } from "@/workers/stack/lock";
import { demandedPort, freePort } from "@/workers/stack/port";
import { birth, run } from "@/workers/stack/process";
import { readState, writeState } from "@/workers/stack/state";
import { readPlaywright, readVitest } from "@/workers/stack/test-tally";

let folder: string;
beforeEach(async () => {
  folder = await mkdtemp(path.join(tmpdir(), "firstlow-stack-"));
});
afterEach(() => rm(folder, { recursive: true }));

async function report(content: unknown): Promise<string> {
  const file = path.join(folder, "report.json");
  await writeFile(file, JSON.stringify(content));
  return file;
}

describe("the tally", () => {
  const vitest = (passed: number, all: number, testResults: object[] = []) =>
    report({ numPassedTests: passed, numTotalTests: all, testResults });
  const browser = (stats: object, errors: object[] = []) =>
    report({ stats: { expected: 0, unexpected: 0, flaky: 0, skipped: 0, ...stats }, errors });

  it("counts a skipped, a flaky and an unloadable test as failed", async () => {
    expect(await readVitest(await vitest(5, 5), 0)).toEqual({ passed: 5, failed: 0 });
    expect(await readVitest(await vitest(5, 7), 0)).toEqual({ passed: 5, failed: 2 });
    const broken = [{ name: "a.test.ts", status: "failed", assertionResults: [] }];
    expect(await readVitest(await vitest(5, 5, broken), 1)).toEqual({ passed: 5, failed: 1 });
    expect(await readPlaywright(await browser({ expected: 4, skipped: 1, flaky: 1 }), 0)).toEqual({ passed: 4, failed: 2 });
  });

  it("is a failure when nothing ran, or the runner was not content for another reason", async () => {
    expect(await readVitest(await vitest(0, 0), 0)).toEqual({ passed: 0, failed: 1 });
    expect(await readVitest(await vitest(5, 5), 1)).toEqual({ passed: 5, failed: 1 });
    expect(await readPlaywright(await browser({}, [{ message: "no tests found" }]), 1)).toEqual({ passed: 0, failed: 1 });
  });
});

describe("the folder's lock", () => {
  it("is held by one process at a time, and named to the second with its address", async () => {
    const lock = await takeLock(folder);
    await lock.note({ address: "http://127.0.0.1:3000" });
    await expect(takeLock(folder)).rejects.toThrow(/already running .* at http:\/\/127\.0\.0\.1:3000/);
    await lock.release();
    await (await takeLock(folder)).release();
  });

  it("is taken over from a dead process, whose child is ended", async () => {
    const child = spawn(process.execPath, ["-e", "setInterval(() => undefined, 1000)"], { detached: true, stdio: "ignore" });
    const pid = child.pid ?? 0;
    const gone = new Promise((resolve) => child.once("exit", resolve));
    const children = [{ name: "application", pid, born: await birth(pid) }];
    // No process has had this one's id and another time of birth.
    await writeFile(path.join(folder, "lock.json"), JSON.stringify({ pid: process.pid, born: "1", children }));
    const lock = await takeLock(folder);
    expect(lock.takenOver).toBe(true);
    await gone;
    await lock.release();
  });

  it("leaves a process alone that only has the number of a former child", async () => {
    const children = [{ name: "application", pid: process.pid, born: "1" }];
    await writeFile(path.join(folder, "lock.json"), JSON.stringify({ pid: 2 ** 22 + 1, born: "1", children }));
    await (await takeLock(folder)).release();
    expect(await birth(process.pid)).toBeDefined();
  });
});

describe("ports", () => {
  it("in use are refused when demanded, and passed over when only wished", async () => {
    const server = net.createServer();
    await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
    const { port } = server.address() as net.AddressInfo;
    await expect(demandedPort(String(port))).rejects.toThrow(`Port ${port} (asked for with PORT) is already used`);
    expect(await freePort(port)).not.toBe(port);
    await new Promise((resolve) => server.close(resolve));
    expect(await demandedPort(String(port))).toBe(port);
    expect(await freePort(port)).toBe(port);
  });

  it("that are no ports are refused", async () => {
    for (const text of ["0", "65536", "3000x", "80.5", "-1"])
      await expect(demandedPort(text)).rejects.toThrow("not a port number");
  });
});

describe("what a start remembers", () => {
  it("comes back, and a damaged file is said and not overwritten", async () => {
    const state = await readState(folder);
    await writeState(folder, { ...state, port: 3005 });
    expect(await readState(folder)).toEqual({ ...state, port: 3005 });
    await writeFile(path.join(folder, "state.json"), "{ not json");
    await expect(readState(folder)).rejects.toThrow("is damaged");
  });
});

describe("a command", () => {
  it("is ended with all that it started when its time is over", async () => {
    const script =
      "const c = require('node:child_process').spawn('sleep', ['1000']); console.log(c.pid); setInterval(() => undefined, 1000)";
    const done = await run({ name: "slow", file: process.execPath, args: ["-e", script], limit: 1500 });
    expect(done.timedOut).toBe(true);
    expect(await birth(Number(done.output.trim()))).toBeUndefined();
  });

  it("that does not exist is named", async () => {
    await expect(run({ name: "the tool", file: "/nowhere/tool", args: [] })).rejects.toThrow("the tool could not be started");
  });
});
