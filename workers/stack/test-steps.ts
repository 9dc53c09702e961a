// In: nothing. Out: the steps of "npm test", in the order they run.

import path from "node:path";
import { applicationEnvironment, seed, serveApplication } from "./application";
import { build } from "./build";
import { Complaint } from "./complaint";
import { exists, findProgram, install } from "./debian";
import { anyPort } from "./port";
import { run, type Service } from "./process";
import { readPlaywright, readVitest, type Tally } from "./test-tally";
import { openTestbed, type Testbed } from "./testbed";

/** What the steps of one run share. */
export interface Bench {
  readonly root: string;
  /** Folder for reports. */
  readonly output: string;
  /** What to end when the run is over. */
  readonly closing: (() => Promise<void>)[];
  readonly shared: { testbed?: Promise<Testbed>; port?: number };
}

interface Step {
  readonly what: string;
  run(bench: Bench): Promise<Tally>;
}

const MINUTE = 60_000;
const DIST = ".next-test";
const PASSED: Tally = { passed: 1, failed: 0 };
const FAILED: Tally = { passed: 0, failed: 1 };

export const STEPS = {
  lint: {
    what: "format and lint",
    run: (bench) => check(bench, "@biomejs/biome/bin/biome", ["check", "--config-path=tests/guards/lint.json", "."]),
  },
  types: { what: "types of the whole tree, and of the pure rooms without DOM and Node", run: checkTypes },
  unit: { what: "guards, unit and property tests", run: runUnit },
  database: { what: "database and storage tests on real services", run: runDatabase },
  build: { what: "production build", run: runBuild },
  browser: { what: "browser tests against the built application", run: runBrowser },
} satisfies Record<string, Step>;

export type StepName = keyof typeof STEPS;

/** One tool, one verdict. */
async function check(bench: Bench, script: string, args: readonly string[]): Promise<Tally> {
  const file = path.join(bench.root, "node_modules", script);
  const done = await run({ name: script, file: process.execPath, args: [file, ...args], cwd: bench.root, limit: 5 * MINUTE });
  if (done.code === 0) return PASSED;
  console.log(done.output.trim());
  if (done.timedOut) console.log("(ended after five minutes)");
  return FAILED;
}

async function checkTypes(bench: Bench): Promise<Tally> {
  // The framework's own declarations of pages and routes, which a fresh clone has not.
  const made = await check(bench, "next/dist/bin/next", ["typegen"]);
  const whole = await check(bench, "typescript/bin/tsc", ["--noEmit"]);
  const pure = await check(bench, "typescript/bin/tsc", ["--noEmit", "-p", "tests/guards/pure.tsconfig.json"]);
  const verdicts = [made, whole, pure];
  return { passed: verdicts.filter((one) => one === PASSED).length, failed: verdicts.filter((one) => one === FAILED).length };
}

async function runVitest(bench: Bench, project: string, env: NodeJS.ProcessEnv): Promise<Tally> {
  const report = path.join(bench.output, `${project}.json`);
  const script = path.join(bench.root, "node_modules/vitest/vitest.mjs");
  const options = [
    "--config",
    "tests/vitest.config.ts",
    "--project",
    project,
    "--reporter=default",
    "--reporter=json",
    `--outputFile.json=${report}`,
  ];
  const args = [script, "run", ...options];
  const done = await run({ name: "vitest", file: process.execPath, args, cwd: bench.root, env, limit: 12 * MINUTE, show: true });
  if (done.timedOut || !(await exists(report))) return FAILED;
  return readVitest(report, done.code);
}

async function runUnit(bench: Bench): Promise<Tally> {
  await provide([
    ["iverilog", "iverilog"],
    ["ghdl", "ghdl"],
  ]);
  return runVitest(bench, "unit", process.env);
}

async function runDatabase(bench: Bench): Promise<Tally> {
  const testbed = await openBed(bench);
  return runVitest(bench, "db", await testbed.environment("tests"));
}

async function runBuild(bench: Bench): Promise<Tally> {
  await build(bench.root, DIST, false);
  return PASSED;
}

async function runBrowser(bench: Bench): Promise<Tally> {
  const chromium = await findChromium();
  const testbed = await openBed(bench);
  const env = applicationEnvironment({}, await testbed.environment("browser"));
  const accounts = await seed(bench.root, env);
  await build(bench.root, DIST, false);
  const port = bench.shared.port ?? 0;
  const log = path.join(bench.output, "application.log");
  const service = await serveApplication(bench.root, DIST, port, env, log);
  bench.closing.push(service.stop);
  const more = { FIRSTLOW_ADDRESS: address(port), FIRSTLOW_ACCOUNTS: JSON.stringify(accounts), FIRSTLOW_CHROMIUM: chromium };
  const args = [path.join(bench.root, "node_modules/@playwright/test/cli.js"), "test", "--config", "tests/playwright.config.ts"];
  const browsing = run({
    name: "playwright",
    file: process.execPath,
    args,
    cwd: bench.root,
    env: { ...env, ...more },
    limit: 12 * MINUTE,
    show: true,
  });
  const done = await Promise.race([browsing, deathOf(service)]);
  await service.stop();
  if (done === "dead") {
    console.log(`The application ended while the browser tests ran; its output is in ${log}.`);
    return FAILED;
  }
  const report = path.join(bench.output, "browser.json");
  if (done.timedOut || !(await exists(report))) return FAILED;
  return readPlaywright(report, done.code);
}

function deathOf(service: Service): Promise<"dead"> {
  return new Promise((resolve) => service.process.once("exit", () => resolve("dead")));
}

/** One set of services for all steps that need one; database and browser tests each get a copy of the migrated database. */
function openBed(bench: Bench): Promise<Testbed> {
  bench.shared.testbed ??= (async () => {
    const port = await anyPort();
    bench.shared.port = port;
    const testbed = await openTestbed(bench.root, address(port));
    bench.closing.push(testbed.close);
    return testbed;
  })();
  return bench.shared.testbed;
}

function address(port: number): string {
  return `http://127.0.0.1:${port}`;
}

/** Installs the Debian packages of programs that are not there. */
async function provide(programs: readonly (readonly [program: string, debianPackage: string])[]): Promise<void> {
  const missing: string[] = [];
  for (const [program, debianPackage] of programs) if (!(await findProgram(program))) missing.push(debianPackage);
  if (missing.length) await install(missing, `A program the tests run (${missing.join(", ")})`);
}

async function findChromium(): Promise<string> {
  const given = process.env.FIRSTLOW_CHROMIUM;
  if (given) return given;
  const found = await findProgram("chromium");
  if (found) return found;
  await install(["chromium", "fonts-liberation"], "Chromium, which the browser tests drive");
  const installed = await findProgram("chromium");
  if (installed) return installed;
  throw new Complaint("Chromium was installed but is not on PATH.", "Give its path as FIRSTLOW_CHROMIUM.");
}
