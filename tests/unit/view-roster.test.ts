import { describe, expect, it } from "vitest";
import type { RosterEntry } from "@/lib/forensics/contract";
import { emptyDraft, lengthOf, rosterDraft, rosterEntry, rosterFits, voltsOf, withField } from "@/lib/view/roster-row";

const feedLog: RosterEntry = {
  role: "target",
  address: 0x50,
  name: "feed log",
  tlow_s: null,
  thigh_s: null,
  vol_v: 0.21,
  stretch_allow_s: 25e-3,
  registers: "01 portion",
};

describe("a roster's row", () => {
  it("comes back as it was", () => {
    expect(rosterEntry(rosterDraft(feedLog, "a"))).toEqual({ entry: feedLog, errors: {} });
    const pump: RosterEntry = {
      ...feedLog,
      role: "controller",
      address: null,
      tlow_s: 5.2e-6,
      thigh_s: 650e-9,
      stretch_allow_s: 0,
    };
    expect(rosterEntry(rosterDraft(pump, "b")).entry).toEqual(pump);
    const wide: RosterEntry = { ...feedLog, address: 0x250 };
    expect(rosterDraft(wide, "c")).toMatchObject({ address: "0x250", bytes: "" });
    expect(rosterEntry(rosterDraft(wide, "c")).entry).toEqual(wide);
  });

  it("takes the address in either notation and keeps the other in step", () => {
    const empty = { ...emptyDraft("a"), name: "feed log" };
    expect(withField(empty, "address", "0x50")).toMatchObject({ address: "0x50", bytes: "A0/A1" });
    expect(withField(empty, "bytes", "a1")).toMatchObject({ address: "0x50", bytes: "a1" });
    expect(rosterEntry(withField(empty, "bytes", "0xA0/0xA1")).entry?.address).toBe(0x50);
    expect(withField(empty, "address", "0x250")).toMatchObject({ bytes: "" });
  });

  it.each([
    ["address", "0xA0", "an address such as 0x50, up to 0x7F, or 0x250 with ten bits"],
    ["address", "feed", "an address such as 0x50, up to 0x7F, or 0x250 with ten bits"],
    ["address", "", "a target needs its address"],
    ["bytes", "A0/A3", "the address bytes such as A0/A1"],
    ["tlow", "5.2 V", "a time such as 5.2 µs"],
    ["thigh", "0", "a time such as 5.2 µs"],
    ["vol", "12 V", "a voltage such as 0.2 V"],
    ["name", " ", "a name is needed"],
  ] as const)("with %s %j says: %s", (field, text, words) => {
    const { entry, errors } = rosterEntry(withField(rosterDraft(feedLog, "a"), field, text));
    expect(entry).toBeNull();
    expect(errors[field]).toBe(words);
  });

  it("reads times and volts with their units", () => {
    expect(["5.2", "5,2 us", "5200 ns", "0.0052ms", "5.2e-6 s"].map(lengthOf)).toEqual(Array(5).fill(5.2e-6));
    expect(["0.18", "180 mV", "0,18 V"].map(voltsOf)).toEqual(Array(3).fill(0.18));
    expect(lengthOf("soon")).toBeUndefined();
  });

  it("is found by name, by 7-bit address, and by the bytes a data sheet prints", () => {
    for (const search of ["FEED", "0x50", "50", "A0", "a0/a1", "0xA1", "portion", ""])
      expect(rosterFits(feedLog, search)).toBe(true);
    for (const search of ["0x51", "A2", "pump"]) expect(rosterFits(feedLog, search)).toBe(false);
  });
});
