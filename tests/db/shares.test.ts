import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { demoCaptures } from "@/fixtures/demo/captures";
import { CreatedShareSchema, ShareListSchema } from "@/lib/case/wire";
import { Browser } from "@/tests/support/browser";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { ask, gatherTeam, type TestTeam } from "@/tests/support/team";
import { sha256, uploader } from "@/tests/support/upload";

let database: TestDatabase;
let cases: typeof import("@/app/api/cases/route");
let one: typeof import("@/app/api/cases/[number]/route");
let notes: typeof import("@/app/api/cases/[number]/notes/route");
let shares: typeof import("@/app/api/cases/[number]/shares/route");
let share: typeof import("@/app/api/cases/[number]/shares/[id]/route");
let reading: typeof import("@/app/api/captures/[id]/reading/route");
let unlock: typeof import("@/app/api/shared/[secret]/unlock/route");
let archive: typeof import("@/app/api/shared/[secret]/captures/[id]/archive/route");
let raw: typeof import("@/app/api/shared/[secret]/captures/[id]/raw/route");
let report: typeof import("@/app/api/shared/[secret]/captures/[id]/report/route");
let team: TestTeam;
let others: TestTeam;
let number: number;
let captureId: string;
let otherCapture: string;
let file: Uint8Array;

beforeAll(async () => {
  database = await openTestDatabase();
  cases = await import("@/app/api/cases/route");
  one = await import("@/app/api/cases/[number]/route");
  notes = await import("@/app/api/cases/[number]/notes/route");
  shares = await import("@/app/api/cases/[number]/shares/route");
  share = await import("@/app/api/cases/[number]/shares/[id]/route");
  reading = await import("@/app/api/captures/[id]/reading/route");
  unlock = await import("@/app/api/shared/[secret]/unlock/route");
  archive = await import("@/app/api/shared/[secret]/captures/[id]/archive/route");
  raw = await import("@/app/api/shared/[secret]/captures/[id]/raw/route");
  report = await import("@/app/api/shared/[secret]/captures/[id]/report/route");
  team = await gatherTeam("Marrow Bay");
  others = await gatherTeam("Lower Sound");
  const demo = demoCaptures().find((candidate) => candidate.file === "tank1-silent.vcd");
  if (!demo) throw new Error("the demo has no tank1-silent.vcd");
  file = demo.bytes;
  const deposit = async (title: string) => {
    const made = (await ask(team.lead.browser, cases.POST, "POST", { body: { title } })).body.number;
    const { body } = await (await uploader(team.technician)).whole(made, demo.file, file);
    const read = await ask(team.technician.browser, reading.PUT, "PUT", { params: { id: body.capture.id }, body: {} });
    expect(read.status).toBe(200);
    return { made, id: body.capture.id };
  };
  ({ made: number, id: captureId } = await deposit("Tank 1 silent"));
  ({ id: otherCapture } = await deposit("not shared"));
  await ask(team.support.browser, notes.POST, "POST", {
    params: { number },
    body: { capture: captureId, anchor: { kind: "transaction", transaction: 3 }, text: "Why here?" },
  });
});

afterAll(() => database.close());

async function make(body: object = {}) {
  const answer = await ask(team.engineer.browser, shares.POST, "POST", { params: { number }, body });
  expect(answer.status).toBe(201);
  return CreatedShareSchema.parse(answer.body);
}

async function open(secret: string, browser = new Browser()) {
  const { readShared } = await import("@/lib/server/shares/read");
  const { fork } = await import("@/lib/server/database");
  return readShared(await fork(), secret, browser.headers().get("cookie") ?? "");
}

const none = { code: "not-found", status: 404 };
const fetchAs = (browser: Browser, door: { GET: Parameters<typeof ask>[1] }, secret: string, id = captureId) =>
  ask(browser, door.GET, "GET", { params: { secret, id } });

describe("a share link", () => {
  it("opens without an account at exactly the view that was shared, and downloads the archive", async () => {
    const view = "capture=1&at=0.0186&zoom=2e-5&only=faulty&text=0x50";
    const { secret, url, share: made } = await make({ view, label: "supplier" });
    expect(url).toBe(`${process.env.APP_URL}/shared/${secret}`);
    expect(secret).toMatch(/^[A-Za-z0-9_-]{43}$/);
    expect(made).toMatchObject({ state: "open", has_passphrase: false, raw_allowed: false, label: "supplier" });
    const opened = await open(secret);
    if (opened.locked) throw new Error("locked");
    expect(opened.view).toBe(view);
    expect(opened.file).toMatchObject({ title: "Tank 1 silent", number });
    expect(opened.file.captures[0].summary?.transactionCount).toBeGreaterThan(10);
    const moved = await fetchAs(new Browser(), archive, secret);
    expect(moved.status).toBe(307);
    expect(moved.headers.get("x-robots-tag")).toBe("noindex");
    const bytes = new Uint8Array(await (await fetch(moved.headers.get("location") ?? "")).arrayBuffer());
    expect(bytes.length).toBe(opened.file.captures[0].archive_size);
  });

  it("does not carry the inside of the team", async () => {
    const { secret, removed } = await make();
    const opened = await open(secret);
    const told = JSON.stringify(opened);
    for (const role of ["lead", "engineer", "technician", "support"] as const) expect(told).not.toContain(`Marrow Bay ${role}`);
    expect(told).not.toContain("@");
    expect(told).not.toContain("assignee");
    expect(told).not.toContain(sha256(Buffer.from(secret)));
    expect(removed).toContain("the names of authors");
  });

  it("is stored only as its hash", async () => {
    const { secret } = await make();
    const rows = await database.query<{ row: string }>("select row_to_json(s)::text as row from shares s");
    const trail = await database.query<{ row: string }>("select row_to_json(e)::text as row from events e");
    for (const { row } of [...rows, ...trail]) expect(row).not.toContain(secret);
    expect(rows.some(({ row }) => row.includes(sha256(Buffer.from(secret))))).toBe(true);
  });

  it("gives the original only where that was allowed", async () => {
    const shut = await make();
    expect((await fetchAs(new Browser(), raw, shut.secret)).status).toBe(403);
    const opened = await make({ raw_allowed: true });
    const moved = await fetchAs(new Browser(), raw, opened.secret);
    expect(moved.status).toBe(307);
    const bytes = new Uint8Array(await (await fetch(moved.headers.get("location") ?? "")).arrayBuffer());
    expect(sha256(bytes)).toBe(sha256(file));
  });

  it("reaches its own case alone", async () => {
    const { secret } = await make({ raw_allowed: true });
    for (const door of [archive, raw, report]) {
      expect((await fetchAs(new Browser(), door, secret, otherCapture)).body).toMatchObject(none);
    }
  });

  it("opens nothing a member opens, and changes nothing", async () => {
    const { secret } = await make();
    const browser = new Browser();
    expect((await ask(browser, one.GET, "GET", { params: { number } })).status).toBe(401);
    expect((await ask(browser, notes.POST, "POST", { params: { number }, body: {} })).status).toBe(401);
    expect((await ask(browser, one.GET, "GET", { params: { number, secret } })).status).toBe(401);
  });

  it.each(["revoked", "expired", "never made", "cut short"])("that is %s is not there", async (why) => {
    const { secret, share: made } = await make({ raw_allowed: true });
    let tried = secret;
    if (why === "revoked") {
      const revoked = await ask(team.lead.browser, share.DELETE, "DELETE", { params: { number, id: made.id } });
      expect(revoked.body.share.state).toBe("revoked");
    }
    if (why === "expired")
      await database.query("update shares set expires_at = now() - interval '1 second' where id = $1", [made.id]);
    if (why === "never made") tried = "A".repeat(43);
    if (why === "cut short") tried = secret.slice(0, 42);
    await expect(open(tried)).rejects.toMatchObject({ code: "not-found", status: 404 });
    for (const door of [archive, raw, report]) expect((await fetchAs(new Browser(), door, tried)).body).toMatchObject(none);
    expect(
      (await ask(new Browser(), unlock.POST, "POST", { params: { secret: tried }, body: { passphrase: "x" } })).body,
    ).toMatchObject(none);
  });

  it("counts how often it was opened", async () => {
    const { secret, share: made } = await make();
    await open(secret);
    await open(secret);
    const { body } = await ask(team.support.browser, shares.GET, "GET", { params: { number } });
    const listed = ShareListSchema.parse(body).shares.find((row) => row.id === made.id);
    expect(listed).toMatchObject({ opened: 2, created_by: "Marrow Bay engineer" });
    expect(JSON.stringify(body)).not.toContain(secret);
  });

  it("tells the report of the capture, as the command prints it", async () => {
    const { secret } = await make();
    const { status, body } = await fetchAs(new Browser(), report, secret);
    expect(status).toBe(200);
    expect(body.schema).toBe("firstlow.report/1");
    const opened = await open(secret);
    if (opened.locked) throw new Error("locked");
    expect(body.transactions).toHaveLength(opened.file.captures[0].summary?.transactionCount ?? -1);
  });
});

describe("a passphrase", () => {
  const say = (browser: Browser, secret: string, passphrase: string) =>
    ask(browser, unlock.POST, "POST", { params: { secret }, body: { passphrase } });
  const keep = (browser: Browser, cookie: string | null) => {
    const [name, value] = (cookie ?? "").split(";")[0].split("=");
    browser.jar.set(name, value);
  };

  it("is asked for before anything is told, and once in this browser", async () => {
    const { secret } = await make({ passphrase: "twelve metres of cable" });
    const browser = new Browser();
    expect(await open(secret, browser)).toEqual({ locked: true });
    expect((await fetchAs(browser, archive, secret)).body).toMatchObject({ code: "share-locked" });
    const wrong = await say(browser, secret, "twelve meters of cable");
    expect(wrong.status).toBe(403);
    expect(wrong.headers.get("set-cookie")).toBeNull();
    const right = await say(browser, secret, "twelve metres of cable");
    expect(right.status).toBe(200);
    expect(right.headers.get("set-cookie")).toMatch(/HttpOnly; SameSite=Lax/);
    keep(browser, right.headers.get("set-cookie"));
    expect((await open(secret, browser)).locked).toBe(false);
    expect((await fetchAs(browser, archive, secret)).status).toBe(307);
    expect((await open(secret, new Browser())).locked).toBe(true);
  });

  it("given for one link opens no other, and not the same one after it was changed", async () => {
    const first = await make({ passphrase: "first passphrase" });
    const second = await make({ passphrase: "first passphrase" });
    const browser = new Browser();
    keep(browser, (await say(browser, first.secret, "first passphrase")).headers.get("set-cookie"));
    expect((await open(second.secret, browser)).locked).toBe(true);
    const changed = await ask(team.engineer.browser, share.PATCH, "PATCH", {
      params: { number, id: first.share.id },
      body: { passphrase: "second passphrase" },
    });
    expect(changed.status).toBe(200);
    expect((await open(first.secret, browser)).locked).toBe(true);
  });

  it("cannot be made up as a cookie", async () => {
    const { secret, share: made } = await make({ passphrase: "something long" });
    const name = `firstlow_link_${made.id.replaceAll("-", "")}`;
    for (const value of ["", "true", "A".repeat(43), secret]) {
      const browser = new Browser();
      browser.jar.set(name, value);
      expect((await open(secret, browser)).locked).toBe(true);
    }
  });

  it("is stored with argon2id and guessed at most twenty times in a quarter of an hour", async () => {
    const { secret, share: made } = await make({ passphrase: "correct one" });
    const [{ hash }] = await database.query<{ hash: string }>("select passphrase_hash as hash from shares where id = $1", [
      made.id,
    ]);
    expect(hash).toMatch(/^\$argon2id\$/);
    const statuses: number[] = [];
    for (let at = 0; at < 21; at += 1) statuses.push((await say(new Browser(`198.51.100.${at}`), secret, `guess ${at}`)).status);
    expect(statuses.slice(0, 20).every((status) => status === 403)).toBe(true);
    expect(statuses[20]).toBe(429);
    const late = await say(new Browser(), secret, "correct one");
    expect(late.status).toBe(429);
    expect(Number(late.headers.get("retry-after"))).toBeGreaterThan(0);
  });

  it("is refused where it would be worth nothing", async () => {
    for (const body of [
      { passphrase: "short" },
      { expires_in_days: 0 },
      { expires_in_days: 400 },
      { view: "a b" },
      { view: "x".repeat(4001) },
    ]) {
      expect((await ask(team.engineer.browser, shares.POST, "POST", { params: { number }, body })).status).toBe(400);
    }
  });
});

describe("who shares", () => {
  it("leads and engineers make and revoke; others do not; strangers find no case", async () => {
    const { share: made } = await make();
    const params = { number, id: made.id };
    for (const role of ["technician", "support"] as const) {
      expect((await ask(team[role].browser, shares.POST, "POST", { params: { number }, body: {} })).status).toBe(403);
      expect((await ask(team[role].browser, share.PATCH, "PATCH", { params, body: { raw_allowed: true } })).status).toBe(403);
      expect((await ask(team[role].browser, share.DELETE, "DELETE", { params })).status).toBe(403);
    }
    expect((await ask(others.lead.browser, shares.POST, "POST", { params: { number }, body: {} })).status).toBe(404);
    expect((await ask(others.lead.browser, shares.GET, "GET", { params: { number } })).status).toBe(404);
    expect((await ask(others.lead.browser, share.DELETE, "DELETE", { params })).status).toBe(404);
    expect((await ask(team.lead.browser, share.DELETE, "DELETE", { params })).status).toBe(200);
    expect((await ask(team.lead.browser, share.PATCH, "PATCH", { params, body: { raw_allowed: true } })).status).toBe(409);
  });

  it("the trail says who made and who revoked it, and never the secret", async () => {
    const { share: made, secret } = await make({ label: "customer" });
    await ask(team.lead.browser, share.DELETE, "DELETE", { params: { number, id: made.id } });
    const rows = await database.query<{ kind: string; words: string }>(
      "select kind, words from events where after->>'share' = $1 order by at",
      [made.id],
    );
    expect(rows).toEqual([
      { kind: "share.created", words: "made a link for customer" },
      { kind: "share.revoked", words: "revoked a link" },
    ]);
    expect(JSON.stringify(rows)).not.toContain(secret);
  });
});
