// In: a limits profile as JSON text or as an object. Out: a Profile, or what is wrong with it. Format "firstlow.limits/1":
// a built-in profile's name and the values that differ from it, times in ns and frequencies in Hz.

import { z } from "zod";
import { ok, type Result, refuse } from "../base/result";
import { allLimits, builtIn, derive, isProfileName, PROFILE_NAMES, type Profile } from "../limits/profile";

export const PROFILE_FORMAT = "firstlow.limits/1";

const bound = z.number().nonnegative().nullable().optional();

export const ProfileFileSchema = z.strictObject({
  format: z.literal(PROFILE_FORMAT),
  name: z.string().min(1).max(80),
  version: z.int().positive(),
  base: z.enum(PROFILE_NAMES),
  /**
   * By symbol as the specification writes it: {"tSU;DAT": {"min": 150}}. null takes a limit away. Limits inside an Hs transfer are
   * marked: {"tLOW (Hs)": {"min": 170}}.
   */
  limits: z.record(z.string(), z.strictObject({ min: bound, max: bound, source: z.string().optional() })),
});

export type ProfileFile = z.infer<typeof ProfileFileSchema>;

/** @param value the parsed JSON */
export function profileFrom(value: unknown, cbPf: number | null): Result<Profile> {
  const parsed = ProfileFileSchema.safeParse(value);
  if (!parsed.success) {
    const [issue] = parsed.error.issues;
    const where = issue.path.length === 0 ? "at its top level" : `at ${issue.path.join(".")}`;
    return refuse(bad(`The limits profile is not usable ${where}: ${issue.message}.`));
  }
  const { name, version, base, limits } = parsed.data;
  const from = builtIn(base, cbPf);
  const listed = allLimits(from);
  const unknown = Object.keys(limits).find((symbol) => listed[symbol] === undefined);
  if (unknown !== undefined) return refuse(bad(`The limits profile sets ${unknown}, which ${base} does not list.`));
  const crossed = Object.entries(limits).find(
    ([, { min, max }]) => typeof min === "number" && typeof max === "number" && min > max,
  );
  if (crossed !== undefined) return refuse(bad(`The limits profile sets a least value above the greatest for ${crossed[0]}.`));
  return ok(derive(from, name, version, limits));
}

/** A profile by its name, file content, or as it is. `null` stays null: the mode is then found from the capture. */
export function resolveProfile(limits: unknown, cbPf: number | null): Result<Profile | null> {
  if (limits === null || limits === undefined) return ok(null);
  if (typeof limits === "string") {
    if (isProfileName(limits)) return ok(builtIn(limits, cbPf));
    return refuse({
      code: "unknown-profile",
      message: `There is no limits profile "${limits}".`,
      advice: `Built in are: ${PROFILE_NAMES.join(", ")}.`,
      place: {},
    });
  }
  if (isProfile(limits)) return ok(limits);
  return profileFrom(limits, cbPf);
}

function isProfile(value: unknown): value is Profile {
  return typeof value === "object" && value !== null && "hs" in value && "limits" in value && "spec" in value;
}

function bad(message: string) {
  return {
    code: "bad-profile",
    message,
    advice: `Write it as {"format":"${PROFILE_FORMAT}","name":"...","version":1,"base":"Fast-mode","limits":{"tSU;DAT":{"min":150}}}, times in ns, frequencies in Hz.`,
    place: {},
  };
}
