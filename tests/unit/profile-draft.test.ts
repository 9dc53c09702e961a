import { describe, expect, it } from "vitest";
import { profileDraft, readDraft } from "@/components/profiles/draft";
import { PROFILE_FORMAT, profileFrom } from "@/lib/diagnosis/profile-file";
import { builtIn } from "@/lib/limits/profile";

const base = builtIn("Fast-mode").limits;
const typed = (min: string, max = "", source = "") => ({ tLOW: { min, max, source } });

describe("a team's limits as typed", () => {
  it("change only what differs from the base", () => {
    expect(readDraft(typed("1400", "", " our test plan 12 "), base).changes).toEqual({
      tLOW: { min: 1400, source: "our test plan 12" },
    });
    expect(readDraft(typed("1300"), base).changes).toEqual({});
    expect(readDraft(typed(""), base).changes).toEqual({});
  });

  it("take a limit away with a dash", () => {
    expect(readDraft(typed("-"), base).changes).toEqual({ tLOW: { min: null } });
    expect(readDraft(typed("", "–"), base).changes).toEqual({});
  });

  it("say what is no number, and a least above the greatest", () => {
    expect(readDraft(typed("fast"), base).errors.get("tLOW")).toBe("a number, or - for no limit");
    expect(readDraft(typed("", "1000"), base).errors.get("tLOW")).toBe("the least lies above the greatest");
  });

  it("come back as they were, and are what the analysis reads", () => {
    const changes = { "tSU;DAT": { min: 150 }, tLOW: { min: null, max: 5000, source: "plan" } };
    expect(readDraft(profileDraft(changes), base)).toEqual({ changes, errors: new Map() });
    const read = profileFrom({ format: PROFILE_FORMAT, name: "Tank line", version: 2, base: "Fast-mode", limits: changes }, null);
    expect(read.ok && read.value.limits["tSU;DAT"].min).toBe(150);
  });
});
