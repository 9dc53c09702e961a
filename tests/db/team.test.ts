import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from "vitest";
import { Browser } from "@/tests/support/browser";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { openMailbox, type TestMailbox } from "@/tests/support/mail";

const password = "nine tanks in a row";
const link = "http://firstlow.test/invitation";

let database: TestDatabase;
let mailbox: TestMailbox;
let auth: typeof import("@/lib/server/auth/actions");
let team: typeof import("@/lib/server/team/actions");
let settle: typeof import("@/lib/server/access/settle").settleSession;

beforeAll(async () => {
  mailbox = await openMailbox();
  database = await openTestDatabase();
  auth = await import("@/lib/server/auth/actions");
  team = await import("@/lib/server/team/actions");
  settle = (await import("@/lib/server/access/settle")).settleSession;
});

// The mail server is closed by the last test, which is about its absence.
afterAll(() => database.close());

beforeEach(() => database.query("delete from throttles"));

let people = 0;
const viewerOf = (browser: Browser) => settle(browser.headers().get("cookie") ?? "");

async function founder(): Promise<{ browser: Browser; email: string; name: string }> {
  people += 1;
  const email = `founder${people}@team.test`;
  const name = `Team ${people}`;
  const browser = new Browser();
  await browser.submit(auth.signUp, { team: name, name: `Founder ${people}`, email, password });
  return { browser, email, name };
}

/** Invites somebody new into the founder's team and accepts. */
async function joiner(lead: Browser, role: string): Promise<{ browser: Browser; email: string }> {
  people += 1;
  const email = `joiner${people}@team.test`;
  await lead.submit(team.invite, { email, role });
  const browser = new Browser();
  const token = await mailbox.token(email, link);
  expect((await browser.submit(team.joinNew, { token, name: `Joiner ${people}`, password })).to).toBe("/cases");
  return { browser, email };
}

async function memberId(email: string, name: string): Promise<string> {
  const [row] = await database.query<{ id: string }>(
    "select m.id from members m join users u on u.id = m.user_id join teams t on t.id = m.team_id where u.email = $1 and t.name = $2",
    [email, name],
  );
  return row.id;
}

describe("an invitation", () => {
  it("is mailed in plain words and makes a member with its role", async () => {
    const { browser, name } = await founder();
    const { browser: joined, email } = await joiner(browser, "technician");
    const [letter] = await mailbox.read(email);
    expect(letter.subject).toContain(`invites you to ${name}`);
    expect(letter.text).toContain("Your role would be technician");
    expect(await viewerOf(joined)).toMatchObject({ kind: "member", role: "technician", team: { name }, user: { email } });
    const trail = await database.query(
      "select a.event from audits a join teams t on t.id = a.team_id where t.name = $1 order by a.at",
      [name],
    );
    expect(trail.map(({ event }) => event)).toEqual(["team.founded", "member.invited", "member.joined"]);
  });

  it("works once, also for two at once", async () => {
    const { browser } = await founder();
    await browser.submit(team.invite, { email: "once@team.test", role: "support" });
    const token = await mailbox.token("once@team.test", link);
    const tries = await Promise.all([1, 2].map((n) => new Browser().submit(team.joinNew, { token, name: `N${n}`, password })));
    expect(tries.filter(({ to }) => to === "/cases")).toHaveLength(1);
    expect(tries.map(({ state }) => state.code).filter(Boolean)).toEqual(["invitation-unusable"]);
    expect((await new Browser().submit(team.joinNew, { token, name: "Late", password })).state.code).toBe("invitation-unusable");
  });

  it("is kept as a hash, ends after seven days, and can be withdrawn", async () => {
    const { browser } = await founder();
    await browser.submit(team.invite, { email: "late@team.test", role: "support" });
    const token = await mailbox.token("late@team.test", link);
    expect(await database.query("select 1 from invitations where token_hash = $1", [token])).toEqual([]);
    const [row] = await database.query<{ id: string; days: number }>(
      "select id, extract(epoch from expires_at - now())::float / 86400 as days from invitations where email = 'late@team.test'",
    );
    expect(row.days).toBeCloseTo(7, 1);
    await database.query("update invitations set expires_at = now() - interval '1 second' where id = $1", [row.id]);
    expect((await new Browser().submit(team.joinNew, { token, name: "Late", password })).state.code).toBe("invitation-unusable");
    expect((await browser.submit(team.revokeInvitation, { id: row.id })).state.code).toBe("not-found");

    await browser.submit(team.invite, { email: "drop@team.test", role: "support" });
    const dropped = await mailbox.token("drop@team.test", link);
    const [open] = await database.query<{ id: string }>("select id from invitations where email = 'drop@team.test'");
    const { browser: stranger } = await founder();
    expect((await stranger.submit(team.revokeInvitation, { id: open.id })).state.code).toBe("not-found");
    expect((await browser.submit(team.revokeInvitation, { id: open.id })).state.status).toBe("done");
    expect((await new Browser().submit(team.joinNew, { token: dropped, name: "Late", password })).state.code).toBe(
      "invitation-unusable",
    );
  });

  it("replaces an earlier one for the same address", async () => {
    const { browser } = await founder();
    await browser.submit(team.invite, { email: "twice@team.test", role: "lead" });
    const first = await mailbox.token("twice@team.test", link);
    await browser.submit(team.invite, { email: "twice@team.test", role: "support" });
    const second = await mailbox.token("twice@team.test", link);
    expect((await new Browser().submit(team.joinNew, { token: first, name: "T", password })).state.code).toBe(
      "invitation-unusable",
    );
    const joined = new Browser();
    await joined.submit(team.joinNew, { token: second, name: "T", password });
    expect(await viewerOf(joined)).toMatchObject({ role: "support" });
  });

  it("is accepted by the account of its address, and by no other", async () => {
    const { browser, name } = await founder();
    const { browser: other, email, name: own } = await founder();
    await browser.submit(team.invite, { email, role: "engineer" });
    const token = await mailbox.token(email, link);
    const { browser: third } = await founder();
    const wrong = await third.submit(team.join, { token });
    expect(wrong.state).toMatchObject({ code: "forbidden" });
    expect((await new Browser().submit(team.join, { token })).state.code).toBe("signed-out");
    expect((await new Browser().submit(team.joinNew, { token, name: "Fake", password })).state.code).toBe("email-taken");
    expect((await other.submit(team.join, { token })).to).toBe("/cases");
    expect(await viewerOf(other)).toMatchObject({ role: "engineer", team: { name } });
    const { listTeams } = await import("@/lib/server/team/members");
    const { fork } = await import("@/lib/server/database");
    const viewer = await viewerOf(other);
    if (viewer.kind !== "member") throw new Error("not signed in");
    expect((await listTeams(await fork(), viewer)).map((row) => [row.name, row.role])).toEqual([
      [own, "lead"],
      [name, "engineer"],
    ]);
    expect((await browser.submit(team.invite, { email: email.toUpperCase(), role: "lead" })).state.code).toBe("already-member");
  });

  it("is for leads to send", async () => {
    const { browser } = await founder();
    for (const role of ["engineer", "technician", "support"]) {
      const { browser: other } = await joiner(browser, role);
      expect((await other.submit(team.invite, { email: "x@team.test", role: "support" })).state.code).toBe("forbidden");
    }
    const odd = await browser.submit(team.invite, { email: "x@team.test", role: "owner" });
    expect(odd.state).toMatchObject({ code: "input-invalid", fields: { role: "Choose one of the roles." } });
  });
});

describe("members", () => {
  it("get another role from a lead, which counts at once", async () => {
    const { browser, name } = await founder();
    const { browser: other, email } = await joiner(browser, "support");
    await browser.submit(team.changeRole, { id: await memberId(email, name), role: "engineer" });
    expect(await viewerOf(other)).toMatchObject({ role: "engineer" });
    expect((await other.submit(team.changeRole, { id: await memberId(email, name), role: "lead" })).state.code).toBe("forbidden");
  });

  it("are out of reach of another team's lead", async () => {
    const { email, name } = await founder();
    const { browser: stranger } = await founder();
    const id = await memberId(email, name);
    expect((await stranger.submit(team.changeRole, { id, role: "support" })).state.code).toBe("not-found");
    expect((await stranger.submit(team.removeMember, { id })).state.code).toBe("not-found");
  });

  it("always include a lead", async () => {
    const { browser, email, name } = await founder();
    const own = await memberId(email, name);
    expect((await browser.submit(team.changeRole, { id: own, role: "engineer" })).state.code).toBe("last-lead");
    expect((await browser.submit(team.removeMember, { id: own })).state.code).toBe("last-lead");
    expect((await browser.submit(team.leaveTeam, {})).state.code).toBe("last-lead");
    const { email: second } = await joiner(browser, "lead");
    expect((await browser.submit(team.changeRole, { id: own, role: "engineer" })).state.status).toBe("done");
    expect((await browser.submit(team.changeRole, { id: await memberId(second, name), role: "support" })).state.code).toBe(
      "forbidden",
    );
  });

  it("include a lead even when two leads demote each other at the same moment", async () => {
    for (let round = 0; round < 5; round++) {
      const { browser, email, name } = await founder();
      const { browser: second, email: secondEmail } = await joiner(browser, "lead");
      const [one, two] = [await memberId(email, name), await memberId(secondEmail, name)];
      await Promise.all([
        browser.submit(team.changeRole, { id: two, role: "support" }),
        second.submit(team.changeRole, { id: one, role: "support" }),
      ]);
      const leads = await database.query(
        "select 1 from members m join teams t on t.id = m.team_id where t.name = $1 and m.role = 'lead'",
        [name],
      );
      expect(leads).toHaveLength(1);
    }
  });

  it("lose access with the next request when removed, and keep their account", async () => {
    const { browser, name } = await founder();
    const { browser: other, email } = await joiner(browser, "engineer");
    await browser.submit(team.removeMember, { id: await memberId(email, name) });
    expect(await viewerOf(other)).toMatchObject({ kind: "person", user: { email } });
    expect((await other.submit(team.leaveTeam, {})).state.code).toBe("forbidden");
    expect((await other.submit(team.addTeam, { name: "On my own" })).to).toBe("/cases");
    expect(await viewerOf(other)).toMatchObject({ kind: "member", role: "lead", team: { name: "On my own" } });
  });

  it("leave by themselves and fall back to another of their teams", async () => {
    const { browser } = await founder();
    const { browser: other } = await joiner(browser, "engineer");
    await other.submit(team.addTeam, { name: "Spare" });
    const viewer = await viewerOf(other);
    expect(viewer).toMatchObject({ team: { name: "Spare" } });
    const { browser: lead } = await joiner(other, "lead");
    expect((await lead.submit(team.renameTeam, { name: "Spare parts" })).state.status).toBe("done");
    expect((await other.submit(team.leaveTeam, {})).to).toBe("/account");
    expect(await viewerOf(other)).toMatchObject({ kind: "member", role: "engineer" });
  });

  it("switch between their own teams only, on one browser", async () => {
    const { browser, email, name } = await founder();
    await browser.submit(team.addTeam, { name: `${name} B` });
    const second = new Browser();
    await second.submit(auth.signIn, { email, password });
    expect(await viewerOf(second)).toMatchObject({ team: { name } });
    const [own] = await database.query<{ id: string }>("select id from teams where name = $1", [name]);
    const { name: foreign } = await founder();
    const [theirs] = await database.query<{ id: string }>("select id from teams where name = $1", [foreign]);
    expect((await browser.submit(team.switchTeam, { id: theirs.id })).state.code).toBe("not-found");
    expect(await viewerOf(browser)).toMatchObject({ team: { name: `${name} B` } });
    expect((await browser.submit(team.switchTeam, { id: own.id })).to).toBe("/cases");
    expect(await viewerOf(browser)).toMatchObject({ team: { name } });
  });
});

describe("the audit trail", () => {
  it("shows a team its own lines, newest first", async () => {
    const { browser, name } = await founder();
    await founder();
    await browser.submit(team.renameTeam, { name: `${name} renamed` });
    const { readAudit } = await import("@/lib/server/audit");
    const { fork } = await import("@/lib/server/database");
    const viewer = await viewerOf(browser);
    if (viewer.kind !== "member") throw new Error("not signed in");
    const lines = await readAudit(await fork(), viewer, 10);
    expect(lines.map(({ event }) => event)).toEqual(["team.renamed", "team.founded"]);
    expect(lines[0].detail).toEqual({ from: name, to: `${name} renamed` });
  });
});

describe("without a mail server", () => {
  it("an invitation is not left open", async () => {
    const { browser, name } = await founder();
    await mailbox.close();
    const log = vi.spyOn(console, "error").mockImplementation(() => undefined);
    const { state } = await browser.submit(team.invite, { email: "nomail@team.test", role: "support" });
    log.mockRestore();
    expect(state.code).toBe("mail-failed");
    const rows = await database.query(
      "select i.revoked_at is not null as revoked from invitations i join teams t on t.id = i.team_id where t.name = $1",
      [name],
    );
    expect(rows).toEqual([{ revoked: true }]);
  });
});
