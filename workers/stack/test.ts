// In: a checkout. Out: everything that must hold before a change is shared, and "N passed, N failed" as the last line.
// "npm test" runs all steps; "npm test types unit" only those named. .ci/run calls exactly this.

import { mkdir, rm } from "node:fs/promises";
import path from "node:path";
import { Complaint, complain } from "./complaint";
import { endAll } from "./process";
import { STEPS, type StepName } from "./test-steps";
import { type Tally, total } from "./test-tally";

const ROOT = path.resolve(import.meta.dirname, "../..");
const OUTPUT = path.join(ROOT, "tests", ".output");
const closing: (() => Promise<void>)[] = [];
const tallies: Tally[] = [];
let interrupted = false;

async function main(): Promise<void> {
  const names = chooseSteps(process.argv.slice(2));
  await rm(OUTPUT, { recursive: true, force: true });
  await mkdir(OUTPUT, { recursive: true });
  const bench = { root: ROOT, output: OUTPUT, closing, shared: {} };
  for (const name of names) {
    if (interrupted) return;
    const began = performance.now();
    console.log(`\n== ${name}: ${STEPS[name].what}`);
    const tally = await STEPS[name].run(bench).catch((error): Tally => {
      complain(error);
      return { passed: 0, failed: 1 };
    });
    tallies.push(tally);
    const seconds = ((performance.now() - began) / 1000).toFixed(1);
    console.log(`== ${name}: ${tally.passed} passed, ${tally.failed} failed (${seconds} s)`);
  }
}

function chooseSteps(asked: readonly string[]): StepName[] {
  const all = Object.keys(STEPS) as StepName[];
  const unknown = asked.filter((name) => !all.includes(name as StepName));
  if (unknown.length) throw new Complaint(`There is no step ${unknown.join(", ")}.`, `Steps: ${all.join(", ")}.`);
  return asked.length ? all.filter((name) => asked.includes(name)) : all;
}

for (const [signal, number] of [
  ["SIGINT", 2],
  ["SIGTERM", 15],
  ["SIGHUP", 1],
] as const) {
  process.on(signal, () => {
    if (interrupted) return;
    interrupted = true;
    process.exitCode = 128 + number;
    console.error(`\nInterrupted (${signal}).`);
    void endAll();
  });
}

try {
  await main();
} catch (error) {
  complain(error);
  tallies.push({ passed: 0, failed: 1 });
} finally {
  for (const close of closing.reverse()) await close().catch(complain);
  await endAll();
}
if (interrupted) tallies.push({ passed: 0, failed: 1 });
const { passed, failed } = total(tallies);
console.log(`\n${passed} passed, ${failed} failed`);
process.exit(process.exitCode ?? (failed > 0 || passed === 0 ? 1 : 0));
