// In: what was asked for. Out: the report on standard output, the exit code. Loaded only after the options were found good.

import { readFile, stat } from "node:fs/promises";
import { basename } from "node:path";
import type { Problem, Result } from "../../lib/base/result";
import type { AnalysisSettings } from "../../lib/diagnosis/analysis";
import { analyze } from "../../lib/diagnosis/analyze";
import { readLog } from "../../lib/diagnosis/log";
import { profileFrom } from "../../lib/diagnosis/profile-file";
import { readRoster } from "../../lib/diagnosis/roster";
import { reportJson } from "../../lib/diagnosis/serial";
import { reportText } from "../../lib/diagnosis/text";
import { TransactionStore } from "../../lib/diagnosis/transaction";
import { openCapture } from "../../lib/engine/samples/open";
import { isProfileName, PROFILE_NAMES, type Profile } from "../../lib/limits/profile";
import { host } from "../host";
import { pathSource } from "../path-source";
import { type Asked, UsageError } from "./options";
import type { Output } from "./output";

/** The file named cannot be used; says which file, where in it, and what was expected. */
export class Unusable extends Error {}

/** @returns 0 within limits or undecided, 1 something failed */
export async function run(asked: Asked, output: Output): Promise<0 | 1> {
  const settings = await settingsOf(asked);
  const source = await pathSource(asked.file).catch((error: unknown) => {
    throw new Unusable(reason(asked.file, error));
  });
  const opened = usable(asked.file, await openCapture(source, host, settings.read));
  const store = new TransactionStore();
  const outcome = await analyze(opened, settings, {
    passing: true,
    head() {},
    edges() {},
    tap() {},
    transactions: (block, bytes) => store.add(block, bytes),
    progress() {},
  });
  if (!outcome.ok) throw new Unusable(problemText(asked.file, outcome.problem));
  const { summary, attribution } = outcome;
  const rows = store.rows(opened.head.timebase, attribution, summary.controllers);
  await output.write(asked.json ? reportJson(summary, rows) : reportText(basename(asked.file), summary, rows));
  return summary.verdict === "fail" ? 1 : 0;
}

async function settingsOf(asked: Asked): Promise<AnalysisSettings> {
  const { scl, sda, taps, interval_s, vdd_v, vil_v, vih_v } = asked;
  return {
    read: { scl, sda, taps, interval_s, vdd_v, vil_v, vih_v },
    limits: await limitsOf(asked.limits, asked.cb_pf),
    cb_pf: asked.cb_pf,
    roster: asked.roster === null ? [] : usable(asked.roster, readRoster(await textOf(asked.roster))),
    log: asked.log === null ? [] : usable(asked.log, readLog(await textOf(asked.log))),
  };
}

async function limitsOf(limits: string | null, cbPf: number | null): Promise<string | Profile | null> {
  if (limits === null || isProfileName(limits)) return limits;
  const there = await stat(limits).then(
    () => true,
    () => false,
  );
  if (!there) throw new UsageError(`--limits "${limits}" is neither a file nor one of: ${PROFILE_NAMES.join(", ")}.`);
  const text = await textOf(limits);
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (error) {
    throw new Unusable(
      `${limits}: this is not JSON (${error instanceof Error ? error.message : "unreadable"}). Expected a limits profile.`,
    );
  }
  return usable(limits, profileFrom(value, cbPf));
}

async function textOf(path: string): Promise<string> {
  return readFile(path, "utf8").catch((error: unknown) => {
    throw new Unusable(reason(path, error));
  });
}

function usable<T>(path: string, result: Result<T>): T {
  if (result.ok) return result.value;
  throw new Unusable(problemText(path, result.problem));
}

function problemText(path: string, { message, advice, place }: Problem): string {
  const where = place.line !== undefined ? `, line ${place.line}` : place.byte !== undefined ? `, byte ${place.byte}` : "";
  return `${path}${where}: ${message} ${advice}`;
}

const REASONS: Readonly<Record<string, string>> = {
  ENOENT: "there is no such file",
  EACCES: "this file may not be read by you",
  EISDIR: "this is a folder, not a file",
};

function reason(path: string, error: unknown): string {
  const code = typeof error === "object" && error !== null && "code" in error ? String(error.code) : "";
  const said = REASONS[code] ?? (error instanceof Error ? error.message : String(error));
  return `${path}: ${said}. Expected a CSV or VCD capture, or either of them gzip-compressed.`;
}
