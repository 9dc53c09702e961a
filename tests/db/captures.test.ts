import { gzipSync } from "node:zlib";
import { ListObjectsV2Command } from "@aws-sdk/client-s3";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { UPLOAD_LIMIT, type Upload, UploadAnswerSchema, UploadListSchema } from "@/lib/case/upload";
import { openTestDatabase, type TestDatabase } from "@/tests/support/database";
import { bucket, client } from "@/tests/support/storage";
import { ask, gatherTeam, type TestTeam } from "@/tests/support/team";
import { plan, put, sha256, table, uploader } from "@/tests/support/upload";

// The real route handlers, a real PostgreSQL, and storage that checks every signature.

const MEBI = 1_048_576;
let database: TestDatabase;
let cases: typeof import("@/app/api/cases/route");
let one: typeof import("@/app/api/cases/[number]/route");
let capture: typeof import("@/app/api/captures/[id]/route");
let raw: typeof import("@/app/api/captures/[id]/raw/route");
let team: TestTeam;
let others: TestTeam;
let number: number;

beforeAll(async () => {
  database = await openTestDatabase();
  cases = await import("@/app/api/cases/route");
  one = await import("@/app/api/cases/[number]/route");
  capture = await import("@/app/api/captures/[id]/route");
  raw = await import("@/app/api/captures/[id]/raw/route");
  team = await gatherTeam("Marrow Bay");
  others = await gatherTeam("Lower Sound");
  number = (await ask(team.lead.browser, cases.POST, "POST", { body: { title: "uploads" } })).body.number;
});

afterAll(() => database.close());

async function captureCount(): Promise<number> {
  return (await ask(team.lead.browser, one.GET, "GET", { params: { number } })).body.captures.length;
}

async function stored(prefix: string): Promise<string[]> {
  const { Contents } = await client.send(new ListObjectsV2Command({ Bucket: bucket, Prefix: prefix }));
  return (Contents ?? []).map((object) => object.Key ?? "");
}

describe("an upload", () => {
  it("becomes a capture with the checksum of the file, and is downloaded byte for byte", async () => {
    const file = table(20 * MEBI);
    const { whole } = await uploader(team.technician).then((steps) => ({
      whole: steps.whole(number, "../run 1/tank µ.csv", file),
    }));
    const { status, body } = await whole;
    expect(status).toBe(200);
    expect(body.capture).toMatchObject({
      name: "tank µ.csv",
      size: file.length,
      sha256: sha256(file),
      summary: null,
      archive_size: null,
    });
    const moved = await ask(team.technician.browser, raw.GET, "GET", { params: { id: body.capture.id } });
    expect(moved.status).toBe(307);
    const answer = await fetch(moved.headers.get("location") ?? "");
    expect(answer.headers.get("content-disposition")).toContain("filename*=UTF-8''tank%20%C2%B5.csv");
    expect(answer.headers.get("content-type")).toBe("application/octet-stream");
    expect(sha256(new Uint8Array(await answer.arrayBuffer()))).toBe(sha256(file));
  });

  it("goes on after a lost connection and a reload with only the parts that are missing", async () => {
    const file = table(25 * MEBI, 2);
    const steps = await uploader(team.engineer);
    const of: Upload = (await steps.start(number, "resumed.csv", file.length)).body.upload;
    expect(of).toMatchObject({ parts: 4, part_size: 8 * MEBI, received: [] });
    const first = await steps.send(of, file, [3]);
    // The line breaks in the middle of part 1.
    const signed = await steps.sign(of.id, [{ number: 1, sha256: sha256(steps.slice(file, of, 1)) }]);
    await plan({ method: "PUT", key: of.id, part: 1, cutAfter: 3 * MEBI });
    await expect(put(signed.body.parts[0].url, steps.slice(file, of, 1))).rejects.toThrow();
    // The page was closed: all it has is what the server tells.
    const listed = UploadListSchema.parse((await steps.list()).body).uploads.find((upload) => upload.id === of.id);
    expect(listed?.received.map((part) => part.number)).toEqual([3]);
    expect(listed?.received[0].sha256).toBe(sha256(steps.slice(file, of, 3)));
    const rest = await steps.send(of, file, [1, 2, 4]);
    const done = await steps.complete(of.id, [...rest, ...first.map((part) => ({ ...part }))]);
    expect(done.status).toBe(200);
    expect(done.body.capture.sha256).toBe(sha256(file));
    // The answer got lost: asking again gives the same capture.
    const again = await steps.complete(of.id, [...rest, ...first]);
    expect(again.body.capture.id).toBe(done.body.capture.id);
    expect(UploadListSchema.parse((await steps.list()).body).uploads.some((upload) => upload.id === of.id)).toBe(false);
  });

  it("takes VCD and gzip of either, and a file of one byte more than a part", async () => {
    const steps = await uploader(team.technician);
    const vcd = Buffer.from("$date today $end\n$timescale 1 ns $end\n$var wire 1 ! SCL $end\n$enddefinitions $end\n#0\n1!\n");
    expect((await steps.whole(number, "a.vcd", vcd)).status).toBe(200);
    expect((await steps.whole(number, "a.vcd.gz", gzipSync(vcd))).status).toBe(200);
    expect((await steps.whole(number, "b.csv.gz", gzipSync(table(MEBI)))).status).toBe(200);
    const border = table(8 * MEBI + 1);
    expect((await steps.whole(number, "border.csv", border)).body.capture.size).toBe(8 * MEBI + 1);
  });

  it("keeps captures of a case in order, however many end at once", async () => {
    const fresh = (await ask(team.lead.browser, cases.POST, "POST", { body: { title: "many" } })).body.number;
    const steps = await uploader(team.technician);
    const all = await Promise.all(Array.from({ length: 5 }, (_, at) => steps.whole(fresh, `${at}.csv`, table(2000, at + 1))));
    expect(all.map((answer) => answer.body.capture.ordinal).sort()).toEqual([1, 2, 3, 4, 5]);
  });
});

describe("nothing is accepted unchecked", () => {
  it("a part that is not what was announced", async () => {
    const file = table(9 * MEBI, 4);
    const steps = await uploader(team.technician);
    const before = await captureCount();
    const of: Upload = (await steps.start(number, "tampered.csv", file.length)).body.upload;
    const signed = await steps.sign(of.id, [
      { number: 1, sha256: sha256(steps.slice(file, of, 1)) },
      { number: 2, sha256: sha256(steps.slice(file, of, 2)) },
    ]);
    const forged = Buffer.from(steps.slice(file, of, 2));
    forged[1000] ^= 1;
    const sent = [
      { number: 1, etag: (await put(signed.body.parts[0].url, steps.slice(file, of, 1))).etag },
      { number: 2, etag: (await put(signed.body.parts[1].url, forged)).etag },
    ];
    const refused = await steps.complete(of.id, sent);
    expect(refused.status).toBe(422);
    expect(refused.body.title).toContain("Part 2 does not have the checksum");
    expect(await captureCount()).toBe(before);
    expect(await stored(`teams/${team.id}/captures/${of.id}/`)).toEqual([]);
    expect((await steps.complete(of.id, sent)).status).toBe(410);
  });

  it("a part of another length: storage refuses it at the address", async () => {
    const file = table(3000);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "long.csv", file.length)).body.upload;
    const signed = await steps.sign(of.id, [{ number: 1, sha256: sha256(file) }]);
    const longer = await put(signed.body.parts[0].url, Buffer.concat([file, Buffer.from("1")]));
    expect(longer.status).toBe(403);
    expect((await steps.complete(of.id, [{ number: 1, etag: longer.etag || "none" }])).status).toBe(409);
    // Nothing is lost: the right part still goes through.
    const sent = await steps.send(of, file, [1]);
    expect((await steps.complete(of.id, sent)).status).toBe(200);
  });

  it("a part that was never announced, never sent, or another than told", async () => {
    const file = table(17 * MEBI, 6);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "gaps.csv", file.length)).body.upload;
    expect((await steps.sign(of.id, [{ number: 4, sha256: sha256(file) }])).status).toBe(400);
    const sent = await steps.send(of, file, [1, 3]);
    const gap = await steps.complete(of.id, [...sent, { number: 2, etag: "x" }]);
    expect(gap.status).toBe(409);
    expect(gap.body.title).toContain("missing or differ from what was sent: 2.");
    const rest = await steps.send(of, file, [2]);
    const wrong = await steps.complete(of.id, [...sent, { number: 2, etag: '"00000000000000000000000000000000"' }]);
    expect(wrong.status).toBe(409);
    expect((await steps.complete(of.id, [...sent, ...rest])).status).toBe(200);
  });

  it("a file that is neither CSV nor VCD, whatever its name", async () => {
    const steps = await uploader(team.technician);
    const before = await captureCount();
    const png = Buffer.concat([Buffer.from([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a]), Buffer.alloc(500, 7)]);
    const zip = Buffer.concat([Buffer.from("PK\u0003\u0004"), Buffer.alloc(500, 1)]);
    const noise = Buffer.from(Array.from({ length: 4000 }, (_, at) => (at * 7919) % 251));
    const cases = [
      ["shot.csv", png, "a PNG picture"],
      ["export.csv", zip, "a ZIP archive"],
      ["dump.vcd", noise, "is a binary file: byte"],
      ["broken.csv.gz", Buffer.concat([Buffer.from([0x1f, 0x8b, 8]), Buffer.alloc(64, 9)]), "nothing can be unpacked"],
      ["inside.gz", gzipSync(png), "a PNG picture"],
      ["page.csv", Buffer.from("<!DOCTYPE html><title>Sign in</title>"), "is a web page"],
    ] as const;
    for (const [name, bytes, why] of cases) {
      const refused = await steps.whole(number, name, bytes);
      expect(refused.status).toBe(415);
      expect(refused.body.title).toContain(why);
    }
    expect(await captureCount()).toBe(before);
  });

  it("a file that is too large, empty or nameless is refused before a byte is sent", async () => {
    const steps = await uploader(team.technician);
    const large = await steps.start(number, "big.csv", UPLOAD_LIMIT.size + 1);
    expect(large.status).toBe(413);
    expect(large.body.title).toContain("4 GiB");
    expect((await steps.start(number, "empty.csv", 0)).status).toBe(400);
    expect((await steps.start(number, " / ", 10)).status).toBe(400);
    expect((await steps.start(99_999, "lost.csv", 10)).status).toBe(404);
    // The largest file allowed still fits into the parts that storage allows.
    const most = await steps.start(number, "most.csv", UPLOAD_LIMIT.size);
    expect(UploadAnswerSchema.parse(most.body).upload.parts).toBeLessThanOrEqual(10_000);
    expect((await steps.cancel(most.body.upload.id)).status).toBe(204);
  });

  it("an address whose signature was changed, or that is used for another part", async () => {
    const steps = await uploader(team.technician);
    const file = table(2000);
    const of: Upload = (await steps.start(number, "signed.csv", file.length)).body.upload;
    const { url } = (await steps.sign(of.id, [{ number: 1, sha256: sha256(file) }])).body.parts[0];
    expect((await put(url.replace("partNumber=1", "partNumber=2"), file)).status).toBe(403);
    expect((await put(url.replace(of.id, crypto.randomUUID()), file)).status).toBe(403);
    expect((await put(url.replace(/X-Amz-Expires=\d+/, "X-Amz-Expires=604800"), file)).status).toBe(403);
    await steps.cancel(of.id);
  });
});

describe("whose upload it is", () => {
  it("support uploads nothing; others' uploads are not there", async () => {
    const file = table(2000);
    expect((await (await uploader(team.support)).start(number, "a.csv", 10)).status).toBe(403);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "mine.csv", file.length)).body.upload;
    const sent = await steps.send(of, file, [1]);
    for (const stranger of [team.engineer, team.lead, others.lead]) {
      const theirs = await uploader(stranger);
      expect((await theirs.read(of.id)).status).toBe(404);
      expect((await theirs.sign(of.id, [{ number: 1, sha256: sha256(file) }])).status).toBe(404);
      expect((await theirs.complete(of.id, sent)).status).toBe(404);
      expect((await theirs.cancel(of.id)).status).toBe(404);
      expect((await theirs.list()).body.uploads.map((upload: Upload) => upload.id)).not.toContain(of.id);
    }
    expect((await (await uploader(others.lead)).start(number, "into yours.csv", 10)).status).toBe(404);
    expect((await steps.complete(of.id, sent)).status).toBe(200);
  });

  it("the original is for who may download, in this team", async () => {
    const steps = await uploader(team.technician);
    const { body } = await steps.whole(number, "private.csv", table(2000));
    const get = (who: TestTeam, role: "lead" | "engineer" | "technician" | "support") =>
      ask(who[role].browser, raw.GET, "GET", { params: { id: body.capture.id } });
    expect((await get(team, "technician")).status).toBe(307);
    expect((await get(team, "support")).status).toBe(403);
    expect((await get(others, "lead")).status).toBe(404);
    const { key } = (await database.query<{ key: string }>("select key from captures where id = $1", [body.capture.id]))[0];
    expect((await fetch(`${process.env.S3_ENDPOINT}/${bucket}/${key}`)).status).toBe(403);
  });

  it("a capture is removed by who uploaded it or may edit the case, with its file", async () => {
    const steps = await uploader(team.technician);
    const { body } = await steps.whole(number, "gone.csv", table(2000));
    const { key } = (await database.query<{ key: string }>("select key from captures where id = $1", [body.capture.id]))[0];
    const remove = (who: typeof team.lead) => ask(who.browser, capture.DELETE, "DELETE", { params: { id: body.capture.id } });
    expect((await remove(others.lead)).status).toBe(404);
    expect((await remove(team.support)).status).toBe(403);
    expect((await remove(team.technician)).status).toBe(204);
    expect((await remove(team.technician)).status).toBe(404);
    expect(await stored(key)).toEqual([]);
  });
});

describe("uploads that end otherwise", () => {
  it("a cancelled one leaves nothing and cannot be finished", async () => {
    const file = table(2000);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "cancelled.csv", file.length)).body.upload;
    const sent = await steps.send(of, file, [1]);
    const { url } = (await steps.sign(of.id, [{ number: 1, sha256: sha256(file) }])).body.parts[0];
    expect((await steps.cancel(of.id)).status).toBe(204);
    expect((await steps.cancel(of.id)).status).toBe(204);
    expect((await steps.complete(of.id, sent)).status).toBe(410);
    expect((await put(url, file)).status).toBe(404);
  });

  it("one that nobody touched for two days is swept, a fresh one is not", async () => {
    const { sweepUploads } = await import("@/lib/server/captures/sweep");
    const { fork } = await import("@/lib/server/database");
    const steps = await uploader(team.technician);
    const old: Upload = (await steps.start(number, "old.csv", 2000)).body.upload;
    const fresh: Upload = (await steps.start(number, "fresh.csv", 2000)).body.upload;
    await database.query("update uploads set touched_at = now() - interval '49 hours' where id = $1", [old.id]);
    expect(await sweepUploads(await fork())).toBe(1);
    expect((await steps.read(old.id)).body.upload.state).toBe("cancelled");
    expect((await steps.read(fresh.id)).body.upload.state).toBe("open");
    expect(await sweepUploads(await fork())).toBe(0);
    await steps.cancel(fresh.id);
  });

  it("one person cannot leave more than twenty unfinished", async () => {
    const person = (await gatherTeam("Weir")).lead;
    const own = (await ask(person.browser, cases.POST, "POST", { body: { title: "many" } })).body.number;
    const steps = await uploader(person);
    for (let at = 0; at < UPLOAD_LIMIT.open; at += 1) expect((await steps.start(own, `${at}.csv`, 10)).status).toBe(201);
    const refused = await steps.start(own, "one more.csv", 10);
    expect(refused.status).toBe(409);
    expect(refused.body.title).toContain("20 unfinished uploads");
  });

  it("a check that died is taken over, a living one is waited for", async () => {
    const file = table(9 * MEBI, 8);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "crash.csv", file.length)).body.upload;
    const sent = await steps.send(of, file, [1, 2]);
    await database.query("update uploads set state = 'checking', touched_at = now() where id = $1", [of.id]);
    const busy = await steps.complete(of.id, sent);
    expect(busy.status).toBe(409);
    expect(busy.body.code).toBe("upload-busy");
    await database.query("update uploads set touched_at = now() - interval '31 minutes' where id = $1", [of.id]);
    expect((await steps.complete(of.id, sent)).status).toBe(200);
  });

  it("storage that does not answer is said, and nothing is lost", async () => {
    const file = table(2000);
    const steps = await uploader(team.technician);
    const of: Upload = (await steps.start(number, "storm.csv", file.length)).body.upload;
    const sent = await steps.send(of, file, [1]);
    await plan({ method: "GET", key: of.id, times: 10, refuse: "SlowDown" });
    const failed = await steps.complete(of.id, sent);
    expect(failed.status).toBe(503);
    expect(failed.body.code).toBe("storage-failed");
    await plan("calm");
    expect((await steps.complete(of.id, sent)).status).toBe(200);
  });
});
