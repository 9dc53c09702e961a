// In: data as some earlier (or this) version of Firstlow stored it. Out: the same in this version's form.
// One function per step, from version n to n + 1, never changed once released. A version from the future is refused:
// reading it would drop what this program does not know.

import type { z } from "zod";
import { ok, type Problem, type Result, refuse } from "../base/result";
import { SETTINGS_VERSION, type Settings, SettingsSchema } from "./case";

/** Turns version n into version n + 1; the index in its ladder is n - 1, since the first version is 1. */
export type Step = (older: Readonly<Record<string, unknown>>) => Record<string, unknown>;

function unreadable(message: string): { readonly ok: false; readonly problem: Problem } {
  return refuse({ code: "stored-unreadable", message, advice: "Open it with the version of Firstlow that saved it.", place: {} });
}

/** Climbs `steps` from the version that `stored` has, then checks the result against `schema`. */
export function climb<T>(what: string, stored: unknown, steps: readonly Step[], schema: z.ZodType<T>): Result<T> {
  const newest = steps.length + 1;
  if (typeof stored !== "object" || stored === null) return unreadable(`The stored ${what} is not an object.`);
  let current: Record<string, unknown> = { ...stored };
  const version = current.version;
  if (typeof version !== "number" || !Number.isInteger(version) || version < 1) {
    return unreadable(`The stored ${what} names no version.`);
  }
  if (version > newest) {
    return unreadable(`The stored ${what} is of version ${version}; this program knows versions up to ${newest}.`);
  }
  for (const step of steps.slice(version - 1)) current = step(current);
  const parsed = schema.safeParse(current);
  return parsed.success ? ok(parsed.data) : unreadable(`The stored ${what} does not fit version ${newest}.`);
}

/** No step yet: version 1 is the first. */
const settingsSteps: readonly Step[] = [];

/** Settings of a case from its JSON column. */
export function upgradeSettings(stored: unknown): Result<Settings> {
  if (settingsSteps.length + 1 !== SETTINGS_VERSION) throw new Error("settings ladder and SETTINGS_VERSION disagree");
  return climb("settings", stored, settingsSteps, SettingsSchema);
}
