import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type Action, actions, allows, type Role, roles } from "@/lib/case/roles";
import { Browser } from "@/tests/support/browser";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";

// Every cell written down once more, by hand: L lead, E engineer, T technician, S support, G holder of a link.
// A change of the table has to be made here too, on purpose.
const cells: Record<Action, string> = {
  "case.read": "LETSG",
  "case.create": "LET",
  "case.edit": "LE",
  "case.status": "LET",
  "case.assign": "LE",
  "case.delete": "L",
  "note.add": "LETS",
  "tag.add": "LET",
  "verdict.give": "LET",
  "finding.write": "LE",
  "brief.print": "LETSG",
  "share.create": "LE",
  "share.revoke": "LE",
  "capture.upload": "LET",
  "capture.download": "LET",
  "profile.edit": "LE",
  "roster.edit": "LE",
  "catalogue.edit": "LE",
  "station.edit": "L",
  "team.read": "LETS",
  "team.edit": "L",
  "team.invite": "L",
  "team.remove": "L",
  "team.role": "L",
  "audit.read": "L",
};

const letter: Record<Role | "guest", string> = { lead: "L", engineer: "E", technician: "T", support: "S", guest: "G" };

describe("the table of roles and actions", () => {
  for (const holder of [...roles, "guest"] as const) {
    it.each(actions)(`${holder}: %s`, (action) => {
      expect(allows(holder, action)).toBe(cells[action].includes(letter[holder]));
    });
  }
});

describe("the doors, through a real session of each role", () => {
  let database: TestDatabase;
  const browsers = new Map<Role, Browser>();
  let loner: Browser;
  let door: (
    action: Action,
    settle?: () => Promise<import("@/lib/server/access/viewer").Viewer>,
  ) => (who: Browser) => Promise<Response>;

  beforeAll(async () => {
    database = await openTestDatabase();
    const { route } = await import("@/lib/server/http/route");
    door = (action, settle) => (who) =>
      who.call(
        route({ who: settle ? "anyone" : "member", action, settle, handle: async ({ viewer }) => ({ kind: viewer.kind }) }),
      );
    const { signUp } = await import("@/lib/server/auth/actions");
    for (const role of roles) {
      const browser = new Browser();
      await browser.submit(signUp, {
        team: "Tank room",
        name: role,
        email: `${role}@access.test`,
        password: "nine tanks in a row",
      });
      await database.query("update members set role = $1 where user_id = (select id from users where email = $2)", [
        role,
        `${role}@access.test`,
      ]);
      browsers.set(role, browser);
    }
    loner = new Browser();
    await loner.submit(signUp, { team: "Gone", name: "Loner", email: "loner@access.test", password: "nine tanks in a row" });
    await database.query("delete from members where user_id = (select id from users where email = 'loner@access.test')");
  });

  afterAll(() => database.close());

  for (const role of roles) {
    it.each(actions)(`${role} at a door for %s`, async (action) => {
      const browser = browsers.get(role) ?? new Browser();
      const response = await door(action)(browser);
      expect(response.status).toBe(cells[action].includes(letter[role]) ? 200 : 403);
      if (response.status === 403) expect(await response.json()).toMatchObject({ code: "forbidden", status: 403 });
    });
  }

  it.each(actions)("nobody without a session passes a door for %s", async (action) => {
    const response = await door(action)(new Browser());
    expect(response.status).toBe(401);
    expect(await response.json()).toMatchObject({ code: "signed-out" });
  });

  it.each(actions)("somebody in no team does not pass a door for %s", async (action) => {
    expect((await door(action)(loner)).status).toBe(403);
  });

  it.each(actions)("a link at a door for %s", async (action) => {
    for (const download of [false, true]) {
      const share = { id: "s", caseId: "c", teamId: "t", download };
      const response = await door(action, async () => ({ kind: "link", share }))(new Browser());
      const expected = cells[action].includes("G") || (action === "capture.download" && download);
      expect(response.status).toBe(expected ? 200 : 403);
    }
  });

  it("reads the role anew with every request", async () => {
    const browser = browsers.get("technician") ?? new Browser();
    expect((await door("tag.add")(browser)).status).toBe(200);
    await database.query(
      "update members set role = 'support' where user_id = (select id from users where email = 'technician@access.test')",
    );
    expect((await door("tag.add")(browser)).status).toBe(403);
    await database.query(
      "update members set role = 'technician' where user_id = (select id from users where email = 'technician@access.test')",
    );
  });
});
