import { execFile } from "node:child_process";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import path from "node:path";
import { promisify } from "node:util";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type DemoCapture, demoCaptures } from "@/fixtures/demo/captures";
import { CaptureFileSchema } from "@/lib/case/case";
import { archiveOf } from "@/tests/support/capture";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { ask, type Colleague, gatherTeam, type TestTeam } from "@/tests/support/team";
import { put, sha256, uploader } from "@/tests/support/upload";

// From an uploaded capture to its archive and summary: made by a browser, or by the server; never taken on trust.

let database: TestDatabase;
let cases: typeof import("@/app/api/cases/route");
let one: typeof import("@/app/api/cases/[number]/route");
let tags: typeof import("@/app/api/cases/[number]/tags/route");
let catalogue: typeof import("@/app/api/fault-tags/route");
let faultTag: typeof import("@/app/api/fault-tags/[id]/route");
let archive: typeof import("@/app/api/captures/[id]/archive/route");
let analysis: typeof import("@/app/api/captures/[id]/analysis/route");
let reading: typeof import("@/app/api/captures/[id]/reading/route");
let report: typeof import("@/app/api/captures/[id]/report/route");
let team: TestTeam;
let others: TestTeam;
let demo: DemoCapture;
let packed: Uint8Array;

beforeAll(async () => {
  database = await openTestDatabase();
  cases = await import("@/app/api/cases/route");
  one = await import("@/app/api/cases/[number]/route");
  tags = await import("@/app/api/cases/[number]/tags/route");
  catalogue = await import("@/app/api/fault-tags/route");
  faultTag = await import("@/app/api/fault-tags/[id]/route");
  archive = await import("@/app/api/captures/[id]/archive/route");
  analysis = await import("@/app/api/captures/[id]/analysis/route");
  reading = await import("@/app/api/captures/[id]/reading/route");
  report = await import("@/app/api/captures/[id]/report/route");
  team = await gatherTeam("Marrow Bay");
  others = await gatherTeam("Lower Sound");
  const found = demoCaptures().find((candidate) => candidate.file === "tank4-oxygen.csv");
  if (!found) throw new Error("the demo has no tank4-oxygen.csv");
  demo = found;
  packed = await archiveOf(demo.file, demo.bytes);
});

afterAll(() => database.close());

async function deposit(): Promise<{ number: number; id: string }> {
  const { number } = (await ask(team.lead.browser, cases.POST, "POST", { body: { title: "No oxygen" } })).body;
  const { body } = await (await uploader(team.technician)).whole(number, demo.file, demo.bytes);
  return { number, id: body.capture.id };
}

const start = (person: Colleague, id: string, bytes: Uint8Array) =>
  ask(person.browser, archive.POST, "POST", { params: { id }, body: { size: bytes.length, sha256: sha256(bytes) } });
const store = (person: Colleague, id: string, key: string, bytes: Uint8Array, more: object = {}) =>
  ask(person.browser, analysis.PUT, "PUT", {
    params: { id },
    body: { archive: { key, size: bytes.length, sha256: sha256(bytes) }, read: {}, ...more },
  });

/** The browser's part: address, PUT, confirmation. */
async function send(id: string, bytes: Uint8Array, more: object = {}) {
  const { body } = await start(team.technician, id, bytes);
  expect((await put(body.url, bytes)).status).toBe(200);
  return store(team.technician, id, body.key, bytes, more);
}

async function archived(id: string): Promise<Uint8Array> {
  const moved = await ask(team.support.browser, archive.GET, "GET", { params: { id } });
  expect(moved.status).toBe(307);
  return new Uint8Array(await (await fetch(moved.headers.get("location") ?? "")).arrayBuffer());
}

describe("an archive made by a browser", () => {
  it("is kept, and the summary is what the server read from it", async () => {
    const { number, id } = await deposit();
    const answer = await send(id, packed, { summary: { verdict: "pass", forged: true } });
    expect(answer.status).toBe(200);
    const capture = CaptureFileSchema.parse(answer.body.capture);
    expect(capture.archive_size).toBe(packed.length);
    expect(capture.timebase).toEqual({ ticksPerSecond: 1e12, origin: "file" });
    expect(capture.summary).toMatchObject({ transactionCount: 90, verdict: "fail" });
    expect(sha256(await archived(id))).toBe(sha256(packed));
    const list = await ask(team.support.browser, cases.GET, "GET", { query: `q=%23${number}` });
    expect(list.body.cases[0]).toMatchObject({ number, verdict: "fail", captures: 1, transactions: 90, faults: 30 });
    expect((await ask(team.support.browser, cases.GET, "GET", { query: "verdict=fail" })).body.total).toBeGreaterThan(0);
  });

  it("reads the same as the original does", async () => {
    const { id } = await deposit();
    const fromArchive = (await send(id, packed)).body.capture.summary;
    const read = await ask(team.technician.browser, reading.PUT, "PUT", { params: { id }, body: {} });
    expect(read.body.capture.summary).toEqual(fromArchive);
    expect(sha256(await archived(id))).toBe(sha256(packed));
  });

  it("is refused where it is not what was announced, damaged, or no archive; what was there stays", async () => {
    const { id } = await deposit();
    expect((await send(id, packed)).status).toBe(200);
    const before = sha256(await archived(id));
    const { body } = await start(team.technician, id, packed);
    const forged = Buffer.from(packed);
    forged[forged.length >> 1] ^= 1;
    expect((await put(body.url, forged)).status).toBe(200);
    const swapped = await store(team.technician, id, body.key, packed);
    expect([swapped.status, swapped.body.code]).toEqual([422, "upload-mismatch"]);
    for (const [bytes, words] of [
      [forged, "is damaged near byte"],
      [packed.subarray(0, packed.length - 20), "ends early"],
      [Buffer.from("time,SCL,SDA\n0,1,1\n"), "does not begin as an edge archive"],
    ] as const) {
      const refused = await send(id, bytes);
      expect([refused.status, refused.body.code]).toEqual([422, "unreadable"]);
      expect(refused.body.title).toContain(words);
    }
    expect(sha256(await archived(id))).toBe(before);
  });

  it("cannot be changed once it was checked, though its address still works", async () => {
    const { id } = await deposit();
    const { body } = await start(team.technician, id, packed);
    await put(body.url, packed);
    expect((await store(team.technician, id, body.key, packed)).status).toBe(200);
    const forged = Buffer.from(packed);
    forged[100] ^= 1;
    expect((await put(body.url, forged)).status).toBe(200);
    expect(sha256(await archived(id))).toBe(sha256(packed));
  });

  it("goes only where its address was given for", async () => {
    const { id } = await deposit();
    const other = await deposit();
    const { body } = await start(team.technician, other.id, packed);
    await put(body.url, packed);
    for (const key of [body.key, "teams/x/original", `${body.key}/../original`]) {
      expect((await store(team.technician, id, key, packed)).status).toBe(400);
    }
    const unsent = (await start(team.technician, id, packed)).body.key;
    expect((await store(team.technician, id, unsent, packed)).status).toBe(422);
    expect((await start(team.support, id, packed)).status).toBe(403);
    expect((await start(others.lead, id, packed)).status).toBe(404);
    expect((await ask(others.lead.browser, archive.GET, "GET", { params: { id } })).status).toBe(404);
    const huge = await ask(team.technician.browser, archive.POST, "POST", {
      params: { id },
      body: { size: 2 ** 40, sha256: sha256(packed) },
    });
    expect(huge.status).toBe(413);
  });
});

describe("a capture read by the server", () => {
  it("is judged anew when the case's limits change, without the original", async () => {
    const { number, id } = await deposit();
    await send(id, packed);
    await database.query("update captures set key = 'nowhere-' || id where id = $1", [id]);
    const settings = { version: 1, limits: { kind: "built-in", name: "Fast-mode Plus" }, cb_pf: null, roster: null };
    const edited = await ask(team.engineer.browser, one.PATCH, "PATCH", { params: { number }, body: { version: 1, settings } });
    expect(edited.status).toBe(200);
    expect(edited.body.captures[0].summary.limits.profile).toBe("Fast-mode Plus");
  });

  it("names what cannot be read, in the reader's own words", async () => {
    const { id } = await deposit();
    const refused = await ask(team.technician.browser, reading.PUT, "PUT", {
      params: { id },
      body: { read: { scl: "nope", sda: "SDA" } },
    });
    expect([refused.status, refused.body.code]).toEqual([422, "unreadable"]);
    expect(refused.body.title).toContain("nope");
  });

  it("gives the report that the command prints, byte for byte", async () => {
    const { id } = await deposit();
    const handler = report.GET;
    const response = await team.support.browser.call(handler, "GET", undefined, { id });
    expect(response.status).toBe(200);
    const text = await response.text();
    const folder = await mkdtemp(path.join(tmpdir(), "firstlow-report-"));
    try {
      const file = path.join(folder, demo.file);
      await writeFile(file, demo.bytes);
      const command = ["--import", "tsx", "workers/decode.command.ts", file, "--json"];
      const printed = await promisify(execFile)(process.execPath, command, { maxBuffer: 1 << 26 }).catch(
        (failed: { code: number; stdout: string }) => failed,
      );
      expect(text).toBe(printed.stdout);
    } finally {
      await rm(folder, { recursive: true });
    }
  });
});

describe("fault tags", () => {
  it("are a default set with one key each, extended by who may", async () => {
    const { body } = await ask(team.support.browser, catalogue.GET, "GET");
    const keys = body.fault_tags.map((tag: { key: string }) => tag.key);
    expect(new Set(keys).size).toBe(keys.length);
    const add = (who: Colleague, fields: object) => ask(who.browser, catalogue.POST, "POST", { body: fields });
    expect((await add(team.technician, { name: "loose plug" })).status).toBe(403);
    const made = await add(team.engineer, { name: "loose plug", key: "l" });
    expect(made.status).toBe(201);
    expect((await add(team.engineer, { name: "loose plug" })).body.fields).toEqual({ name: "is taken" });
    expect((await add(team.engineer, { name: "leakage", key: "l" })).body.fields).toEqual({ key: "is taken" });
    expect((await add(team.engineer, { name: "long key", key: "ll" })).status).toBe(400);
    const edit = (who: Colleague, fields: object) =>
      ask(who.browser, faultTag.PATCH, "PATCH", { params: { id: made.body.fault_tag.id }, body: fields });
    expect((await edit(others.lead, { name: "mine" })).status).toBe(404);
    expect((await edit(team.lead, { retired: true })).body.fault_tag).toMatchObject({ retired: true, key: null });
    expect((await add(team.engineer, { name: "leakage", key: "l" })).status).toBe(201);
  });

  it("go on many places at once, once each, and come off again", async () => {
    const { number, id } = await deposit();
    const known = (await ask(team.technician.browser, catalogue.GET, "GET")).body.fault_tags;
    const wish = (transaction: number) => ({
      capture: id,
      fault_tag: known[1].id,
      anchor: { kind: "transaction", transaction },
      remark: "",
    });
    const change = (who: Colleague, body: object) => ask(who.browser, tags.POST, "POST", { params: { number }, body });
    const many = Array.from({ length: 1000 }, (_, at) => wish(at));
    const added = await change(team.technician, { add: many });
    expect(added.status).toBe(200);
    expect(added.body.added.map((tag: { anchor: { transaction: number } }) => tag.anchor.transaction)).toEqual(
      many.map(({ anchor }) => anchor.transaction),
    );
    const again = await change(team.engineer, { add: [wish(3), wish(1000)] });
    expect(again.body.added[0].id).toBe(added.body.added[3].id);
    expect(again.body.added[0].author).toBe("Marrow Bay technician");
    const off = await change(team.technician, { remove: [added.body.added[3].id, crypto.randomUUID()] });
    expect(off.body.removed).toEqual([added.body.added[3].id]);
    const view = await ask(team.support.browser, one.GET, "GET", { params: { number } });
    expect(view.body.tags).toHaveLength(1000);
    expect(view.body.fault_tags).toHaveLength(1);
    expect((await change(team.support, { add: [wish(1)] })).status).toBe(403);
    expect((await change(others.lead, { add: [wish(1)] })).status).toBe(404);
  });

  it("are refused on another case's capture or from another team's catalogue, all or nothing", async () => {
    const { number, id } = await deposit();
    const other = await deposit();
    const ours = (await ask(team.lead.browser, catalogue.GET, "GET")).body.fault_tags[0].id;
    const foreign = (await ask(others.lead.browser, catalogue.GET, "GET")).body.fault_tags[0].id;
    const anchor = { kind: "range", from_tick: 10, to_tick: 20 };
    for (const wrong of [
      { capture: other.id, fault_tag: ours, anchor },
      { capture: id, fault_tag: foreign, anchor },
    ]) {
      const refused = await ask(team.technician.browser, tags.POST, "POST", {
        params: { number },
        body: { add: [{ capture: id, fault_tag: ours, anchor }, wrong] },
      });
      expect(refused.status).toBe(400);
    }
    expect((await ask(team.lead.browser, one.GET, "GET", { params: { number } })).body.tags).toEqual([]);
  });
});
