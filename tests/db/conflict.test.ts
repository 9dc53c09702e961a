import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { ask, gatherTeam, type TestTeam } from "@/tests/support/team";

// Two people edit the same thing at the same time: whatever the order, both texts are there afterwards.

let database: TestDatabase;
let cases: typeof import("@/app/api/cases/route");
let one: typeof import("@/app/api/cases/[number]/route");
let notes: typeof import("@/app/api/cases/[number]/notes/route");
let note: typeof import("@/app/api/cases/[number]/notes/[id]/route");
let events: typeof import("@/app/api/cases/[number]/events/route");
let rosters: typeof import("@/app/api/rosters/route");
let roster: typeof import("@/app/api/rosters/[id]/route");
let profiles: typeof import("@/app/api/profiles/route");
let profile: typeof import("@/app/api/profiles/[id]/route");
let team: TestTeam;

beforeAll(async () => {
  database = await openTestDatabase();
  cases = await import("@/app/api/cases/route");
  one = await import("@/app/api/cases/[number]/route");
  notes = await import("@/app/api/cases/[number]/notes/route");
  note = await import("@/app/api/cases/[number]/notes/[id]/route");
  events = await import("@/app/api/cases/[number]/events/route");
  rosters = await import("@/app/api/rosters/route");
  roster = await import("@/app/api/rosters/[id]/route");
  profiles = await import("@/app/api/profiles/route");
  profile = await import("@/app/api/profiles/[id]/route");
  team = await gatherTeam("Marrow Bay");
});

afterAll(() => database.close());

async function open(title: string): Promise<number> {
  return (await ask(team.lead.browser, cases.POST, "POST", { body: { title } })).body.number;
}

function edit(who: "lead" | "engineer", number: number, version: number, change: object) {
  return ask(team[who].browser, one.PATCH, "PATCH", { params: { number }, body: { version, ...change } });
}

describe("a case edited by two", () => {
  it("keeps the first finding and answers the second writer with it", async () => {
    const number = await open("two findings");
    expect((await edit("lead", number, 1, { finding: "The pump controller yields." })).status).toBe(200);
    const second = await edit("engineer", number, 1, { finding: "The logger yields." });
    expect(second.status).toBe(409);
    expect(second.body).toMatchObject({ code: "stale", theirs: { finding: "The pump controller yields.", version: 2 } });
    expect(second.body.title).toContain("finding");
    const stored = await ask(team.lead.browser, one.GET, "GET", { params: { number } });
    expect(stored.body.finding).toBe("The pump controller yields.");
    const merged = await edit("engineer", number, second.body.theirs.version, {
      finding: "The pump controller yields; the logger waits.",
    });
    expect(merged.status).toBe(200);
  });

  it("lets exactly one of two simultaneous writers through, every time", async () => {
    const number = await open("race");
    for (let round = 1; round <= 12; round += 1) {
      const { version } = (await ask(team.lead.browser, one.GET, "GET", { params: { number } })).body;
      const both = await Promise.all([
        edit("lead", number, version, { finding: `lead ${round}` }),
        edit("engineer", number, version, { finding: `engineer ${round}` }),
      ]);
      expect(both.map((answer) => answer.status).sort()).toEqual([200, 409]);
      const refused = both.find((answer) => answer.status === 409);
      const stored = (await ask(team.lead.browser, one.GET, "GET", { params: { number } })).body.finding;
      expect(refused?.body.theirs.finding).toBe(stored);
    }
  });

  it("does not let different fields stand in each other's way", async () => {
    const number = await open("side by side");
    expect((await edit("lead", number, 1, { status: "in-work" })).status).toBe(200);
    const other = await edit("engineer", number, 1, { finding: "Written meanwhile." });
    expect(other.status).toBe(200);
    expect(other.body).toMatchObject({ status: "in-work", finding: "Written meanwhile." });
  });

  it("does not refuse somebody who wants what already stands there", async () => {
    const number = await open("same");
    expect((await edit("lead", number, 1, { status: "closed" })).status).toBe(200);
    expect((await edit("engineer", number, 1, { status: "closed" })).status).toBe(200);
  });

  it("is not in the way of a note, nor a note in its way", async () => {
    const number = await open("note meanwhile");
    await ask(team.support.browser, notes.POST, "POST", {
      params: { number },
      body: { capture: null, anchor: { kind: "whole" }, text: "a question" },
    });
    expect((await edit("lead", number, 1, { finding: "An answer." })).status).toBe(200);
  });

  it("keeps every earlier text in the trail", async () => {
    const number = await open("history");
    for (const [version, finding] of ["one", "two", "three"].entries()) {
      expect((await edit("lead", number, version + 1, { finding })).status).toBe(200);
    }
    const { body } = await ask(team.lead.browser, events.GET, "GET", { params: { number } });
    expect(body.events.slice(0, 3).map((event: { before: object }) => event.before)).toEqual([
      { finding: "two" },
      { finding: "one" },
      { finding: "" },
    ]);
  });
});

describe("a note edited by two", () => {
  it("answers the second with the first's text, and is not removed unseen", async () => {
    const number = await open("note");
    const { body } = await ask(team.engineer.browser, notes.POST, "POST", {
      params: { number },
      body: { capture: null, anchor: { kind: "whole" }, text: "bit 5?" },
    });
    const params = { number, id: body.note.id };
    expect((await ask(team.lead.browser, note.PATCH, "PATCH", { params, body: { version: 1, text: "bit 5: yes" } })).status).toBe(
      200,
    );
    const second = await ask(team.engineer.browser, note.PATCH, "PATCH", { params, body: { version: 1, text: "bit 6" } });
    expect(second.status).toBe(409);
    expect(second.body.theirs).toMatchObject({ text: "bit 5: yes", version: 2 });
    expect((await ask(team.engineer.browser, note.DELETE, "DELETE", { params, body: { version: 1 } })).status).toBe(409);
  });
});

describe("the team's lists edited by two", () => {
  const pump = {
    role: "controller",
    address: null,
    name: "pump controller",
    tlow_s: 4.9e-6,
    thigh_s: 4.2e-6,
    vol_v: null,
    stretch_allow_s: null,
    registers: "",
  };

  it("keeps the first roster and answers the second writer with it", async () => {
    const made = await ask(team.engineer.browser, rosters.POST, "POST", { body: { name: "tank bus", entries: [pump] } });
    expect(made.status).toBe(201);
    const params = { id: made.body.roster.id };
    const put = (version: number, name: string) =>
      ask(team.engineer.browser, roster.PUT, "PUT", { params, body: { version, name, entries: [pump] } });
    const both = await Promise.all([put(1, "tank bus A"), put(1, "tank bus B")]);
    expect(both.map((answer) => answer.status).sort()).toEqual([200, 409]);
    const stored = (await ask(team.support.browser, roster.GET, "GET", { params })).body.roster;
    expect(stored.version).toBe(2);
    expect(both.find((answer) => answer.status === 409)?.body.theirs.name).toBe(stored.name);
    expect((await ask(team.engineer.browser, rosters.POST, "POST", { body: { name: stored.name, entries: [] } })).status).toBe(
      409,
    );
    expect((await ask(team.technician.browser, rosters.POST, "POST", { body: { name: "mine", entries: [] } })).status).toBe(403);
  });

  it("keeps every version of a limits profile for the cases judged by it", async () => {
    const body = { name: "hatchery limits", base: "Fast-mode", changes: { "tSU;DAT": { min: 150 } } };
    const made = await ask(team.engineer.browser, profiles.POST, "POST", { body });
    expect(made.status).toBe(201);
    const { id } = made.body.profile;
    const settings = { version: 1, limits: { kind: "team", profile: id, version: 1 }, cb_pf: null, roster: null };
    const { body: opened } = await ask(team.lead.browser, cases.POST, "POST", { body: { title: "judged", settings } });
    const next = { ...body, version: 1, changes: { "tSU;DAT": { min: 200 } } };
    const changed = await ask(team.engineer.browser, profile.PUT, "PUT", { params: { id }, body: next });
    expect(changed.body.profile.version).toBe(2);
    expect((await ask(team.engineer.browser, profile.PUT, "PUT", { params: { id }, body: next })).status).toBe(409);
    expect((await ask(team.engineer.browser, profile.DELETE, "DELETE", { params: { id } })).status).toBe(204);
    const read = await ask(team.support.browser, one.GET, "GET", { params: { number: opened.number } });
    expect(read.body.profile).toEqual({
      name: "hatchery limits",
      version: 1,
      base: "Fast-mode",
      changes: { "tSU;DAT": { min: 150 } },
    });
    expect((await ask(team.engineer.browser, profiles.POST, "POST", { body: { ...body, base: "Fastest" } })).status).toBe(400);
    // The name is free again.
    expect((await ask(team.engineer.browser, profiles.POST, "POST", { body })).status).toBe(201);
  });
});
