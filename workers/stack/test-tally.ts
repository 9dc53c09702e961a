// In: the reports of the test runners. Out: how many passed and how many did not. A test that was skipped did not pass.

import { readFile } from "node:fs/promises";
import { z } from "zod";

export interface Tally {
  readonly passed: number;
  readonly failed: number;
}

export function total(tallies: readonly Tally[]): Tally {
  return tallies.reduce((sum, one) => ({ passed: sum.passed + one.passed, failed: sum.failed + one.failed }), {
    passed: 0,
    failed: 0,
  });
}

const vitestReport = z.object({
  numPassedTests: z.number(),
  numTotalTests: z.number(),
  testResults: z.array(z.object({ name: z.string(), status: z.string(), assertionResults: z.array(z.unknown()) })),
});

/** Vitest's JSON reporter. A file that could not even be loaded counts as one failure. */
export async function readVitest(file: string, exitCode: number): Promise<Tally> {
  const report = vitestReport.parse(JSON.parse(await readFile(file, "utf8")));
  const broken = report.testResults.filter((one) => one.status === "failed" && one.assertionResults.length === 0).length;
  return settle(report.numPassedTests, report.numTotalTests - report.numPassedTests + broken, exitCode);
}

const playwrightReport = z.object({
  stats: z.object({ expected: z.number(), unexpected: z.number(), flaky: z.number(), skipped: z.number() }),
  errors: z.array(z.unknown()),
});

/** Playwright's JSON reporter. */
export async function readPlaywright(file: string, exitCode: number): Promise<Tally> {
  const { stats, errors } = playwrightReport.parse(JSON.parse(await readFile(file, "utf8")));
  return settle(stats.expected, stats.unexpected + stats.flaky + stats.skipped + errors.length, exitCode);
}

/** A runner that was not content, or found nothing to run, has failed whatever it counted. */
function settle(passed: number, failed: number, exitCode: number): Tally {
  return { passed, failed: failed === 0 && (exitCode !== 0 || passed === 0) ? 1 : failed };
}
