import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from "vitest";
import { Browser } from "@/tests/support/browser";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { openMailbox, type TestMailbox } from "@/tests/support/mail";

const password = "nine tanks in a row";
const cookie = "firstlow_session";

let database: TestDatabase;
let mailbox: TestMailbox;
let auth: typeof import("@/lib/server/auth/actions");
let settle: typeof import("@/lib/server/access/settle").settleSession;

beforeAll(async () => {
  mailbox = await openMailbox();
  database = await openTestDatabase();
  auth = await import("@/lib/server/auth/actions");
  settle = (await import("@/lib/server/access/settle")).settleSession;
});

afterAll(async () => {
  await database.close();
  await mailbox.close();
});

beforeEach(() => database.query("delete from throttles"));

let people = 0;

/** Signs somebody new up and gives their browser and address. */
async function newcomer(): Promise<{ browser: Browser; email: string }> {
  people += 1;
  const email = `person${people}@auth.test`;
  const browser = new Browser();
  const answer = await browser.submit(auth.signUp, { team: `Team ${people}`, name: `Person ${people}`, email, password });
  expect(answer.to).toBe("/cases");
  return { browser, email };
}

const viewerOf = (browser: Browser) => settle(browser.headers().get("cookie") ?? "");

describe("sign-up", () => {
  it("founds a team with the person as lead, signed in", async () => {
    const browser = new Browser();
    await browser.submit(auth.signUp, { team: " Hatchery ", name: "Ada Pike", email: " Ada@Auth.test ", password });
    expect(await viewerOf(browser)).toMatchObject({
      kind: "member",
      role: "lead",
      team: { name: "Hatchery" },
      user: { name: "Ada Pike", email: "ada@auth.test" },
    });
    const trail = await database.query("select event from audits where actor_name = 'Ada Pike'");
    expect(trail).toEqual([{ event: "team.founded" }]);
  });

  it("refuses the same address in other letters, and gives back what was typed but not the password", async () => {
    const { email } = await newcomer();
    const { state, to } = await new Browser().submit(auth.signUp, {
      team: "Second",
      name: "Second",
      email: email.toUpperCase(),
      password,
    });
    expect(to).toBeNull();
    expect(state).toMatchObject({ status: "refused", code: "email-taken", fields: { email: expect.any(String) } });
    expect(state.values).toEqual({ team: "Second", name: "Second", email: email.toUpperCase() });
    expect(await database.query("select 1 from teams where name = 'Second'")).toEqual([]);
  });

  it("lets one of several at once have the address", async () => {
    const fields = { team: "Race", name: "Race", email: "race@auth.test", password };
    const answers = await Promise.all(Array.from({ length: 5 }, () => new Browser().submit(auth.signUp, fields)));
    expect(answers.filter(({ to }) => to === "/cases")).toHaveLength(1);
    expect(answers.filter(({ state }) => state.code === "email-taken")).toHaveLength(4);
    expect(await database.query("select count(*)::int as n from teams where name = 'Race'")).toEqual([{ n: 1 }]);
  });

  it("names every wrong field", async () => {
    const { state } = await new Browser().submit(auth.signUp, { team: " ", name: "", email: "no", password: "short" });
    expect(state.code).toBe("input-invalid");
    expect(Object.keys(state.fields).sort()).toEqual(["email", "name", "password", "team"]);
  });

  it("keeps argon2id hashes of the stated cost and only hashes of session ids", async () => {
    const { browser, email } = await newcomer();
    const [user] = await database.query<{ password_hash: string }>("select password_hash from users where email = $1", [email]);
    expect(user.password_hash).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
    const secret = browser.jar.get(cookie);
    expect(secret).toMatch(/^[a-z2-7]{40}$/);
    expect(await database.query("select 1 from sessions where id = $1", [secret])).toEqual([]);
    expect(
      await database.query("select 1 from sessions where id = encode(sha256(convert_to($1, 'UTF8')), 'hex')", [secret]),
    ).toHaveLength(1);
  });
});

describe("sign-in and sign-out", () => {
  it("signs in with the address in any letters and goes where the person was going", async () => {
    const { email } = await newcomer();
    const browser = new Browser();
    const answer = await browser.submit(auth.signIn, { email: email.toUpperCase(), password, next: "/cases/7?row=12" });
    expect(answer.to).toBe("/cases/7?row=12");
    expect(await viewerOf(browser)).toMatchObject({ kind: "member", user: { email } });
  });

  it.each(["//evil.test", "/\\evil.test", "https://evil.test", "javascript:alert(1)", "cases"])(
    "never goes to %s",
    async (next) => {
      const { email } = await newcomer();
      expect((await new Browser().submit(auth.signIn, { email, password, next })).to).toBe("/cases");
    },
  );

  it("says the same for a wrong password and an unknown address", async () => {
    const { email } = await newcomer();
    const wrong = await new Browser().submit(auth.signIn, { email, password: "ten tanks in a row" });
    const unknown = await new Browser().submit(auth.signIn, { email: "nobody@auth.test", password });
    expect(wrong.state.code).toBe("wrong-credentials");
    expect({ ...wrong.state, values: {} }).toEqual({ ...unknown.state, values: {} });
  });

  it("does the password work for an unknown address too", async () => {
    const { checkPassword, hashPassword } = await import("@/lib/server/auth/password");
    const stored = await hashPassword(password);
    expect(await checkPassword(stored, password)).toBe(true);
    expect(await checkPassword(stored, "other")).toBe(false);
    expect(await checkPassword(null, password)).toBe(false);
    // The same password composed and decomposed is the same password.
    expect(await checkPassword(await hashPassword("caf\u00e9 am Hafen"), "cafe\u0301 am Hafen")).toBe(true);
  });

  it("ends the session on the server, not only in the browser", async () => {
    const { browser } = await newcomer();
    const stolen = new Map(browser.jar);
    expect((await browser.submit(auth.signOut, {})).to).toBe("/");
    expect(browser.jar.has(cookie)).toBe(false);
    const thief = new Browser();
    for (const [name, value] of stolen) thief.jar.set(name, value);
    expect((await viewerOf(thief)).kind).toBe("guest");
  });

  it("ends the session that the browser had before a new sign-in", async () => {
    const { browser, email } = await newcomer();
    await browser.submit(auth.signIn, { email, password });
    const rows = await database.query("select 1 from sessions s join users u on u.id = s.user_id where u.email = $1", [email]);
    expect(rows).toHaveLength(1);
  });

  it("takes a cookie off the browser whose session has ended", async () => {
    const { browser } = await newcomer();
    await database.query("delete from sessions");
    const { state } = await browser.submit(auth.rename, { name: "New" });
    expect(state.code).toBe("signed-out");
    expect(browser.jar.has(cookie)).toBe(false);
  });
});

describe("the length of a session", () => {
  const daysLeft = async (email: string): Promise<number> => {
    const [row] = await database.query<{ days: number }>(
      "select extract(epoch from s.expires_at - now())::float / 86400 as days from sessions s join users u on u.id = s.user_id where u.email = $1",
      [email],
    );
    return row?.days;
  };
  const setDays = (email: string, days: number) =>
    database.query(
      "update sessions set expires_at = now() + make_interval(days => $2) where user_id = (select id from users where email = $1)",
      [email, days],
    );

  it("slides when used in its second half, and only then", async () => {
    const { browser, email } = await newcomer();
    expect(await daysLeft(email)).toBeCloseTo(30, 1);
    await setDays(email, 16);
    await viewerOf(browser);
    expect(await daysLeft(email)).toBeCloseTo(16, 1);
    await setDays(email, 14);
    expect((await viewerOf(browser)).kind).toBe("member");
    expect(await daysLeft(email)).toBeCloseTo(30, 1);
  });

  it("leaves no row behind for ever", async () => {
    const { email } = await newcomer();
    await setDays(email, -1);
    await newcomer();
    expect(await daysLeft(email)).toBeUndefined();
  });

  it("ends for good", async () => {
    const { browser, email } = await newcomer();
    await setDays(email, -1);
    expect((await viewerOf(browser)).kind).toBe("guest");
    expect(await daysLeft(email)).toBeUndefined();
  });
});

describe("the account's own changes", () => {
  it("lists browsers and signs out one, or all others, of the same person only", async () => {
    const { browser, email } = await newcomer();
    const { browser: stranger } = await newcomer();
    const second = new Browser();
    const third = new Browser();
    for (const other of [second, third]) await other.submit(auth.signIn, { email, password });
    const { listDevices } = await import("@/lib/server/auth/devices");
    const { fork } = await import("@/lib/server/database");
    const viewer = await viewerOf(browser);
    if (viewer.kind !== "member") throw new Error("not signed in");
    const devices = await listDevices(await fork(), viewer);
    expect(devices.filter(({ current }) => current)).toHaveLength(1);
    expect(devices).toHaveLength(3);

    const own = devices.find(({ current }) => current);
    expect((await browser.submit(auth.endDevice, { id: own?.id ?? "" })).state.code).toBe("not-found");
    expect((await stranger.submit(auth.endDevice, { id: devices[0].id })).state.code).toBe("not-found");
    const victim = devices.find(({ current }) => !current);
    expect((await browser.submit(auth.endDevice, { id: victim?.id ?? "" })).state.status).toBe("done");
    const kinds = async () => (await Promise.all([browser, second, third, stranger].map(viewerOf))).map(({ kind }) => kind);
    expect((await kinds()).filter((kind) => kind === "guest")).toHaveLength(1);
    expect((await browser.submit(auth.endOtherDevices, {})).state.message).toBe("1 other browser was signed out.");
    expect(await kinds()).toEqual(["member", "guest", "guest", "member"]);
  });

  it("changes the password only with the present one, and signs out the others", async () => {
    const { browser, email } = await newcomer();
    const other = new Browser();
    await other.submit(auth.signIn, { email, password });
    const wrong = await browser.submit(auth.changePassword, { currentPassword: "guess", newPassword: "eleven tanks in a row" });
    expect(wrong.state).toMatchObject({ code: "wrong-password", fields: { currentPassword: expect.any(String) }, values: {} });
    expect((await viewerOf(other)).kind).toBe("member");
    await browser.submit(auth.changePassword, { currentPassword: password, newPassword: "eleven tanks in a row" });
    expect((await viewerOf(browser)).kind).toBe("member");
    expect((await viewerOf(other)).kind).toBe("guest");
    expect((await other.submit(auth.signIn, { email, password })).state.code).toBe("wrong-credentials");
    expect((await other.submit(auth.signIn, { email, password: "eleven tanks in a row" })).to).toBe("/cases");
  });

  it("renames the person", async () => {
    const { browser } = await newcomer();
    await browser.submit(auth.rename, { name: "  Bea Tench " });
    expect(await viewerOf(browser)).toMatchObject({ user: { name: "Bea Tench" } });
  });
});

describe("a forgotten password", () => {
  it("is replaced once through the mailed link, which signs out every browser", async () => {
    const { browser, email } = await newcomer();
    const guest = new Browser();
    const asked = await guest.submit(auth.forgot, { email });
    const [letter] = await mailbox.read(email);
    expect(letter.subject).toBe("A new password for Firstlow");
    const token = await mailbox.token(email, "http://firstlow.test/reset");
    expect(await database.query("select 1 from resets where token_hash = $1", [token])).toEqual([]);

    const used = await guest.submit(auth.reset, { token, password: "twelve tanks in a row" });
    expect(used.to).toBe("/cases");
    expect(await viewerOf(guest)).toMatchObject({ kind: "member", user: { email } });
    expect((await viewerOf(browser)).kind).toBe("guest");
    const again = await new Browser().submit(auth.reset, { token, password: "thirteen tanks in a row" });
    expect(again.state.code).toBe("reset-unusable");
    expect((await new Browser().submit(auth.signIn, { email, password: "twelve tanks in a row" })).to).toBe("/cases");

    const unknown = await new Browser().submit(auth.forgot, { email: "nobody@auth.test" });
    expect(unknown.state.message.replace("nobody@auth.test", email)).toBe(asked.state.message);
    expect(await mailbox.read("nobody@auth.test")).toEqual([]);
  });

  it("gives one of two tries at once the link", async () => {
    const { email } = await newcomer();
    await new Browser().submit(auth.forgot, { email });
    const token = await mailbox.token(email, "/reset");
    const tries = ["first of the two tries", "second of the two tries"];
    const answers = await Promise.all(tries.map((next) => new Browser().submit(auth.reset, { token, password: next })));
    expect(answers.map(({ to }) => to).filter(Boolean)).toHaveLength(1);
    expect(answers.map(({ state }) => state.code).filter(Boolean)).toEqual(["reset-unusable"]);
  });

  it("works with the newest link only, and for an hour", async () => {
    const { email } = await newcomer();
    await new Browser().submit(auth.forgot, { email });
    const first = await mailbox.token(email, "/reset");
    await new Browser().submit(auth.forgot, { email });
    const second = await mailbox.token(email, "/reset");
    expect(second).not.toBe(first);
    expect((await new Browser().submit(auth.reset, { token: first, password })).state.code).toBe("reset-unusable");
    const [{ minutes }] = await database.query<{ minutes: number }>(
      "select extract(epoch from expires_at - now())::float / 60 as minutes from resets order by created_at desc limit 1",
    );
    expect(minutes).toBeGreaterThan(59);
    expect(minutes).toBeLessThanOrEqual(60);
    await database.query("update resets set expires_at = now() - interval '1 second'");
    expect((await new Browser().submit(auth.reset, { token: second, password })).state.code).toBe("reset-unusable");
  });

  it("is not asked for without end", async () => {
    const { email } = await newcomer();
    for (let n = 0; n < 5; n++) expect((await new Browser().submit(auth.forgot, { email })).state.status).toBe("done");
    expect((await new Browser("198.51.100.9").submit(auth.forgot, { email })).state.code).toBe("too-many");
    expect(await mailbox.read(email)).toHaveLength(5);
  });
});

describe("guessing", () => {
  it("stops after ten wrong passwords, for that caller and account alone, until the window ends", async () => {
    const { email } = await newcomer();
    const guesser = new Browser("198.51.100.1");
    for (let n = 0; n < 10; n++) {
      expect((await guesser.submit(auth.signIn, { email, password: `guess ${n}` })).state.code).toBe("wrong-credentials");
    }
    const stopped = await guesser.submit(auth.signIn, { email, password });
    expect(stopped.state.code).toBe("too-many");
    expect(stopped.state.message).toMatch(/Try again in 15 minutes\./);
    expect((await new Browser("198.51.100.2").submit(auth.signIn, { email, password })).to).toBe("/cases");
    await database.query("update throttles set ends_at = now() - interval '1 second'");
    expect((await guesser.submit(auth.signIn, { email, password })).to).toBe("/cases");
  });

  it("counts tries made at the same time", async () => {
    const { email } = await newcomer();
    const tries = Array.from({ length: 16 }, (_, n) =>
      new Browser("198.51.100.3").submit(auth.signIn, { email, password: `guess ${n}` }),
    );
    const codes = (await Promise.all(tries)).map(({ state }) => state.code);
    expect(codes.filter((code) => code === "wrong-credentials")).toHaveLength(10);
    expect(codes.filter((code) => code === "too-many")).toHaveLength(6);
  });

  it("does not count against the person who knows the password", async () => {
    const { email } = await newcomer();
    const browser = new Browser("198.51.100.4");
    for (let n = 0; n < 9; n++) await browser.submit(auth.signIn, { email, password: "a slip" });
    for (let n = 0; n < 3; n++) expect((await browser.submit(auth.signIn, { email, password })).to).toBe("/cases");
    for (let n = 0; n < 9; n++) {
      expect((await browser.submit(auth.signIn, { email, password: "a slip" })).state.code).toBe("wrong-credentials");
    }
  });

  it("stops one account being guessed from many places", async () => {
    const { email } = await newcomer();
    await database.query("delete from throttles");
    const { rules } = await import("@/lib/server/rate");
    const { strike } = await import("@/lib/server/rate");
    for (let n = 0; n < rules["sign-in-account"].max; n++) await strike("sign-in-account", email);
    expect((await new Browser("198.51.100.200").submit(auth.signIn, { email, password })).state.code).toBe("too-many");
  });

  it("keeps no address of those who tried", async () => {
    await new Browser("198.51.100.77").submit(auth.signIn, { email: "typo@auth.test", password });
    const rows = await database.query<{ key: string }>("select key from throttles");
    expect(rows.length).toBeGreaterThan(0);
    expect(rows.filter(({ key }) => /typo|198\.51/.test(key))).toEqual([]);
  });
});

describe("where a change comes from", () => {
  it.each([null, "http://evil.test", "null", "http://firstlow.test.evil.test", "http://firstlow.test:81"])(
    "refuses an action from %s",
    async (origin) => {
      const { email } = await newcomer();
      const { state } = await new Browser("203.0.113.9", origin).submit(auth.signIn, { email, password });
      expect(state.code).toBe("origin-refused");
    },
  );

  it("refuses a route's change from elsewhere before anything runs, and lets reads through", async () => {
    const { route } = await import("@/lib/server/http/route");
    const handle = vi.fn(async () => ({ done: true }));
    const door = route({ who: "anyone", action: null, handle });
    const foreign = new Browser("203.0.113.9", "http://evil.test");
    for (const method of ["POST", "PUT", "PATCH", "DELETE"]) {
      const response = await foreign.call(door, method);
      expect(response.status).toBe(403);
      expect(response.headers.get("content-type")).toContain("application/problem+json");
      expect(await response.json()).toMatchObject({ code: "origin-refused", requestId: response.headers.get("x-request-id") });
    }
    expect(handle).not.toHaveBeenCalled();
    expect((await foreign.call(door)).status).toBe(200);
    expect((await new Browser().call(door, "POST")).status).toBe(200);
  });

  it("takes the caller's address from the last proxy that can be trusted", async () => {
    const { callerAddress } = await import("@/lib/server/http/caller");
    expect(callerAddress("203.0.113.1", 0)).toBe("203.0.113.1");
    expect(callerAddress("6.6.6.6, 203.0.113.1", 1)).toBe("203.0.113.1");
    expect(callerAddress("6.6.6.6, 203.0.113.1, 10.0.0.2", 2)).toBe("203.0.113.1");
    expect(callerAddress("10.0.0.2", 3)).toBe("10.0.0.2");
    expect(callerAddress(null, 1)).toBe("unknown");
  });
});

describe("what a door answers", () => {
  it("tells nothing of our own faults but the request number", async () => {
    const { route } = await import("@/lib/server/http/route");
    const log = vi.spyOn(console, "error").mockImplementation(() => undefined);
    const door = route({
      who: "anyone",
      action: null,
      handle: async () => {
        throw new Error("secret path /etc/firstlow");
      },
    });
    const response = await new Browser().call(door);
    const text = await response.text();
    expect(response.status).toBe(500);
    expect(response.headers.get("cache-control")).toBe("no-store");
    expect(text).not.toContain("secret");
    expect(JSON.parse(text)).toMatchObject({ code: "internal", status: 500 });
    expect(log).toHaveBeenCalledWith(expect.stringContaining(JSON.parse(text).requestId), expect.any(Error));
    log.mockRestore();
  });

  it("checks bodies, queries and path parameters", async () => {
    const { route } = await import("@/lib/server/http/route");
    const { z } = await import("zod");
    const door = route({
      who: "anyone",
      action: null,
      input: z.object({ row: z.coerce.number().int() }),
      params: z.object({ id: z.uuid() }),
      handle: async ({ input, params }) => ({ ...input, ...params }),
    });
    const browser = new Browser();
    const id = "0197fd5c-0000-7000-8000-000000000001";
    expect(await (await browser.call(door, "POST", { row: 4 }, { id })).json()).toEqual({ row: 4, id });
    expect(await (await browser.call(door, "GET", undefined, { id }, "http://firstlow.test/x?row=5")).json()).toEqual({
      row: 5,
      id,
    });
    const wrong = await browser.call(door, "POST", { row: "x" }, { id });
    expect(wrong.status).toBe(400);
    expect(await wrong.json()).toMatchObject({ code: "input-invalid", fields: { row: expect.any(String) } });
    expect((await browser.call(door, "POST", { row: 4 }, { id: "1; drop table" })).status).toBe(404);
    expect((await browser.call(door, "POST", undefined, { id })).status).toBe(415);
    expect((await browser.call(door, "POST", { row: 4, fill: "x".repeat(5_000_000) }, { id })).status).toBe(413);
  });

  it("answers the health check from the database", async () => {
    const { GET } = await import("@/app/api/health/route");
    const response = await new Browser().call(GET);
    expect(response.status).toBe(200);
    expect(await response.json()).toEqual({ status: "ok" });
  });
});
