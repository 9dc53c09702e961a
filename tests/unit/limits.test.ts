import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { ProfileFileSchema, profileFrom, resolveProfile } from "@/lib/diagnosis/profile-file";
import { builtIn, derive, highSpeedTable, PROFILE_NAMES } from "@/lib/limits/profile";
import { PUBLISHED } from "@/lib/limits/published/mode";
import { SOURCES } from "@/lib/limits/published/sources";
import { boundsNs } from "@/lib/limits/ticks";

// The facts file names, value by value, the document and table it was read in (UM10204 Rev 6 and 7, SMBus by device sheets).
const facts = JSON.parse(readFileSync(new URL("../../fixtures/published/i2c-limits.json", import.meta.url), "utf8"));

test("every published limit is the fact as it was read, with its source and status", () => {
  expect(PUBLISHED).toEqual(facts.modes);
  expect(SOURCES).toEqual(facts.sources);
  let limits = 0;
  for (const mode of Object.values(PUBLISHED)) {
    for (const limit of Object.values(mode.parameters)) {
      expect(["VERIFIED", "MEMORY", "COMPUTED"]).toContain(limit.status);
      limits++;
    }
  }
  expect(limits).toBeGreaterThan(190);
});

test.each([
  ["Standard-mode", "standard"],
  ["Fast-mode", "fast"],
  ["Fast-mode Plus", "fast_plus"],
  ["SMBus 2.0", "smbus2_100k"],
  ["SMBus 3 100 kHz", "smbus3_100k"],
  ["SMBus 3 400 kHz", "smbus3_400k"],
  ["SMBus 3 1 MHz", "smbus3_1M"],
] as const)("the profile %s holds the limits of %s", (name, mode) => {
  const { limits } = builtIn(name);
  for (const [symbol, fact] of Object.entries<{ min: number | null; max: number | null }>(facts.modes[mode].parameters)) {
    expect([symbol, limits[symbol].min, limits[symbol].max]).toEqual([symbol, fact.min, fact.max]);
  }
  expect(Object.keys(limits)).toEqual(Object.keys(facts.modes[mode].parameters));
});

test("High-speed limits lie on the line between the two printed tables (UM10204 Rev 6 Table 12 note 2)", () => {
  const middle = highSpeedTable(250);
  expect(middle.tLOW.min).toBe((160 + 320) / 2);
  expect(middle.tHIGH.min).toBe((60 + 120) / 2);
  expect(middle["tHD;DAT"].max).toBe((70 + 150) / 2);
  expect(middle.fSCLH.max).toBe((3_400_000 + 1_700_000) / 2);
  expect(highSpeedTable(100).tLOW.min).toBe(160);
  expect(highSpeedTable(400).tLOW.min).toBe(320);
  // Outside the printed range the nearest table holds.
  expect(highSpeedTable(20).tLOW.min).toBe(160);
  expect(builtIn("High-speed", 400).hs.tHIGH.min).toBe(120);
  // STOP returns the bus to Fast-mode (UM10204 5.3.3).
  expect(builtIn("High-speed").limits.tBUF.min).toBe(1300);
});

test("a frequency is judged as its period, and the lower limit of a rise time is never judged", () => {
  expect(boundsNs("fSCL", builtIn("Fast-mode").limits.fSCL)).toEqual({ min: 2500, max: null });
  expect(boundsNs("fSMB", builtIn("SMBus 2.0").limits.fSMB)).toEqual({ min: 10_000, max: 100_000 });
  expect(boundsNs("tr", builtIn("Fast-mode").limits.tr)).toEqual({ min: null, max: 300 });
});

test("a team's profile is a copy with changed values that say whose they are", () => {
  const base = builtIn("Fast-mode");
  const own = derive(base, "Hatchery line", 3, { "tSU;DAT": { min: 150 }, tLOW: { max: 9000 } });
  expect(own.limits["tSU;DAT"]).toMatchObject({ min: 150, max: null, status: "TEAM", source: "Hatchery line version 3" });
  expect(own.limits.tLOW).toMatchObject({ min: 1300, max: 9000 });
  expect(own.limits.tHIGH).toEqual(base.limits.tHIGH);
  expect([own.base, own.version]).toEqual(["Fast-mode", 3]);
});

test("a derived profile changes what holds inside a High-speed transfer, whatever the capacitance", () => {
  const changes = {
    ...file,
    base: "High-speed",
    limits: { "tLOW (Hs)": { min: 170 }, "trDA (Hs)": { max: 60 }, tLOW: { min: 1400 } },
  };
  for (const pf of [100, 400]) {
    const read = profileFrom(changes, pf);
    if (!read.ok) throw new Error(read.problem.message);
    const { limits, hs } = read.value;
    expect([limits.tLOW.min, hs.tLOW.min, hs.trDA.max]).toEqual([1400, 170, 60]);
    expect(hs.tLOW.source).toBe("Line 2 version 1");
    expect(hs.tHIGH).toEqual(highSpeedTable(pf).tHIGH);
  }
  const misspelt = profileFrom({ ...file, limits: { "tFOO (Hs)": { min: 1 } } }, null);
  expect(!misspelt.ok && misspelt.problem.message).toContain("tFOO (Hs), which Standard-mode does not list");
});

const file = { format: "firstlow.limits/1", name: "Line 2", version: 1, base: "Standard-mode", limits: { tBUF: { min: 9000 } } };

test("a profile file becomes a profile", () => {
  expect(ProfileFileSchema.safeParse(file).success).toBe(true);
  const read = profileFrom(file, null);
  expect(read.ok && read.value.limits.tBUF.min).toBe(9000);
});

test.each([
  [{ ...file, format: "other" }, /format/],
  [{ ...file, base: "Slow-mode" }, /base/],
  [{ ...file, limits: { tBUF: { min: -1 } } }, /limits\.tBUF\.min/],
  [{ ...file, limits: { tBUF: { low: 1 } } }, /limits\.tBUF/],
  [{ ...file, limits: { tFOO: { min: 1 } } }, /tFOO, which Standard-mode does not list/],
  [{ ...file, limits: { tLOW: { min: 5, max: 4 } } }, /above the greatest for tLOW/],
  [[1], /top level/],
])("a profile file that cannot be used says where: %#", (value, message) => {
  const read = profileFrom(value, null);
  expect(read.ok).toBe(false);
  if (!read.ok) expect(read.problem.message).toMatch(message);
});

test("an unknown profile name is refused with the names there are", () => {
  const read = resolveProfile("Turbo", null);
  expect(!read.ok && read.problem.advice).toContain(PROFILE_NAMES.join(", "));
});
