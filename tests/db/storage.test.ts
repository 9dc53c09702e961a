// The storage contract: what the application needs from any S3-compatible server, asked through the AWS SDK.
// The server is the one of S3_ENDPOINT: the fake in "npm test", any other by "npm run storage-contract".

import { createHash, randomBytes, randomUUID } from "node:crypto";
import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CopyObjectCommand,
  CreateMultipartUploadCommand,
  DeleteObjectCommand,
  DeleteObjectsCommand,
  GetObjectCommand,
  HeadObjectCommand,
  ListMultipartUploadsCommand,
  ListObjectsV2Command,
  ListPartsCommand,
  PutObjectCommand,
  UploadPartCommand,
} from "@aws-sdk/client-s3";
import { afterAll, describe, expect, it } from "vitest";
import { bucket, client, presign, refusal, send, uploadParts } from "@/tests/support/storage";

const prefix = `contract/${randomUUID()}/`;
const MIB = 1024 * 1024;

afterAll(async () => {
  const left = await client.send(new ListObjectsV2Command({ Bucket: bucket, Prefix: prefix }));
  for (const { Key } of left.Contents ?? []) await client.send(new DeleteObjectCommand({ Bucket: bucket, Key }));
});

async function put(name: string, body: string | Buffer = "hello"): Promise<string> {
  const Key = prefix + name;
  await client.send(new PutObjectCommand({ Bucket: bucket, Key, Body: body }));
  return Key;
}

async function text(Key: string, range?: string): Promise<string> {
  const answer = await client.send(new GetObjectCommand({ Bucket: bucket, Key, Range: range }));
  return (await answer.Body?.transformToString()) ?? "";
}

describe("one object", () => {
  it("comes back byte for byte, with its md5 as ETag, its type and its metadata", async () => {
    const body = randomBytes(300_000);
    const Key = `${prefix}bytes with spaces & plus+ (ünïcode) '!*.bin`;
    const stored = await client.send(
      new PutObjectCommand({ Bucket: bucket, Key, Body: body, ContentType: "text/csv", Metadata: { owner: "harbour" } }),
    );
    expect(stored.ETag).toBe(`"${createHash("md5").update(body).digest("hex")}"`);
    const answer = await client.send(new GetObjectCommand({ Bucket: bucket, Key }));
    expect(Buffer.from((await answer.Body?.transformToByteArray()) ?? []).equals(body)).toBe(true);
    expect(answer).toMatchObject({ ContentType: "text/csv", ContentLength: 300_000, Metadata: { owner: "harbour" } });
    const head = await client.send(new HeadObjectCommand({ Bucket: bucket, Key }));
    expect(head).toMatchObject({ ETag: stored.ETag, ContentLength: 300_000 });
  });

  it("is replaced by a second put, and gone after a delete, which may be repeated", async () => {
    const Key = await put("twice", "first");
    await put("twice", "second");
    expect(await text(Key)).toBe("second");
    await client.send(new DeleteObjectCommand({ Bucket: bucket, Key }));
    await client.send(new DeleteObjectCommand({ Bucket: bucket, Key }));
    expect(await refusal(client.send(new GetObjectCommand({ Bucket: bucket, Key })))).toEqual({ status: 404, name: "NoSuchKey" });
    expect((await refusal(client.send(new HeadObjectCommand({ Bucket: bucket, Key })))).status).toBe(404);
  });

  it("may be empty", async () => {
    expect(await text(await put("empty", ""))).toBe("");
  });

  it("is copied with its type, and replaced description where asked", async () => {
    const Key = await put("original", "copied bytes");
    await client.send(new CopyObjectCommand({ Bucket: bucket, Key: `${prefix}copy`, CopySource: `${bucket}/${Key}` }));
    expect(await text(`${prefix}copy`)).toBe("copied bytes");
  });

  it("is served in ranges: from-to, from, the last bytes; 416 beyond its end", async () => {
    const Key = await put("range", "0123456789");
    expect(await text(Key, "bytes=2-4")).toBe("234");
    expect(await text(Key, "bytes=7-")).toBe("789");
    expect(await text(Key, "bytes=-3")).toBe("789");
    expect(await text(Key, "bytes=8-100")).toBe("89");
    const answer = await client.send(new GetObjectCommand({ Bucket: bucket, Key, Range: "bytes=2-4" }));
    expect(answer).toMatchObject({ ContentRange: "bytes 2-4/10", ContentLength: 3, $metadata: { httpStatusCode: 206 } });
    expect(await refusal(client.send(new GetObjectCommand({ Bucket: bucket, Key, Range: "bytes=10-" })))).toEqual({
      status: 416,
      name: "InvalidRange",
    });
  });

  it("is put only when absent, if asked so, and read only when changed", async () => {
    const Key = await put("once", "mine");
    const again = client.send(new PutObjectCommand({ Bucket: bucket, Key, Body: "yours", IfNoneMatch: "*" }));
    expect(await refusal(again)).toEqual({ status: 412, name: "PreconditionFailed" });
    expect(await text(Key)).toBe("mine");
    const { ETag } = await client.send(new HeadObjectCommand({ Bucket: bucket, Key }));
    expect((await refusal(client.send(new GetObjectCommand({ Bucket: bucket, Key, IfNoneMatch: ETag })))).status).toBe(304);
  });
});

describe("integrity", () => {
  it("takes a checksum that fits and refuses one that does not", async () => {
    const Key = `${prefix}checked`;
    // The check value of CRC-32/ISO-HDLC over "123456789" is 0xCBF43926 (RFC 1952 names the same polynomial); base64 of the 4 bytes.
    const right = client.send(new PutObjectCommand({ Bucket: bucket, Key, Body: "123456789", ChecksumCRC32: "y/Q5Jg==" }));
    expect((await right).$metadata.httpStatusCode).toBe(200);
    const wrong = client.send(new PutObjectCommand({ Bucket: bucket, Key, Body: "123456780", ChecksumCRC32: "y/Q5Jg==" }));
    expect((await refusal(wrong)).status).toBe(400);
    // 0xE3069283: the check value of CRC-32C over "123456789", RFC 3720 appendix B.4 family.
    const castagnoli = client.send(new PutObjectCommand({ Bucket: bucket, Key, Body: "123456789", ChecksumCRC32C: "4waSgw==" }));
    expect((await castagnoli).$metadata.httpStatusCode).toBe(200);
  });

  it("refuses a Content-MD5 that does not fit", async () => {
    const md5 = createHash("md5").update("another body").digest("base64");
    const wrong = client.send(new PutObjectCommand({ Bucket: bucket, Key: `${prefix}md5`, Body: "a body", ContentMD5: md5 }));
    expect(await refusal(wrong)).toEqual({ status: 400, name: "BadDigest" });
  });
});

describe("an upload in parts", () => {
  it("is created, filled in any order, listed, completed, with the ETag of its parts", async () => {
    const Key = `${prefix}parts`;
    const bodies = [randomBytes(5 * MIB), randomBytes(5 * MIB), randomBytes(1000)];
    const { UploadId, parts } = await uploadParts(Key, bodies, [3, 1, 2]);
    const listed = await client.send(new ListPartsCommand({ Bucket: bucket, Key, UploadId }));
    expect(listed.Parts?.map(({ PartNumber, Size }) => [PartNumber, Size])).toEqual([
      [1, 5 * MIB],
      [2, 5 * MIB],
      [3, 1000],
    ]);
    expect(listed.Parts?.map(({ ETag }) => ETag)).toEqual(parts.map(({ ETag }) => ETag));
    const done = await client.send(
      new CompleteMultipartUploadCommand({ Bucket: bucket, Key, UploadId, MultipartUpload: { Parts: parts } }),
    );
    const digests = Buffer.concat(bodies.map((body) => createHash("md5").update(body).digest()));
    expect(done.ETag).toBe(`"${createHash("md5").update(digests).digest("hex")}-3"`);
    const answer = await client.send(new GetObjectCommand({ Bucket: bucket, Key }));
    const whole = Buffer.from((await answer.Body?.transformToByteArray()) ?? []);
    expect(whole.equals(Buffer.concat(bodies))).toBe(true);
    const late = client.send(new ListPartsCommand({ Bucket: bucket, Key, UploadId }));
    expect((await refusal(late)).name).toBe("NoSuchUpload");
  });

  it("takes a part again, and refuses the old tag of it at completion", async () => {
    const Key = `${prefix}again`;
    const { UploadId, parts } = await uploadParts(Key, [Buffer.from("old")], [1]);
    const fresh = await client.send(
      new UploadPartCommand({ Bucket: bucket, Key, UploadId, PartNumber: 1, Body: Buffer.from("new") }),
    );
    const stale = client.send(
      new CompleteMultipartUploadCommand({ Bucket: bucket, Key, UploadId, MultipartUpload: { Parts: parts } }),
    );
    expect(await refusal(stale)).toEqual({ status: 400, name: "InvalidPart" });
    const Parts = [{ PartNumber: 1, ETag: fresh.ETag }];
    await client.send(new CompleteMultipartUploadCommand({ Bucket: bucket, Key, UploadId, MultipartUpload: { Parts } }));
    expect(await text(Key)).toBe("new");
  });

  it("refuses parts out of order, and small ones that are not the last", async () => {
    const Key = `${prefix}order`;
    const { UploadId, parts } = await uploadParts(Key, [randomBytes(1000), randomBytes(1000)], [1, 2]);
    const complete = (Parts: typeof parts) =>
      client.send(new CompleteMultipartUploadCommand({ Bucket: bucket, Key, UploadId, MultipartUpload: { Parts } }));
    expect((await refusal(complete([parts[1], parts[0]]))).name).toBe("InvalidPartOrder");
    expect((await refusal(complete(parts))).name).toBe("EntityTooSmall");
    await client.send(new AbortMultipartUploadCommand({ Bucket: bucket, Key, UploadId }));
  });

  it("is found among the unfinished, and gone with its parts after an abort", async () => {
    const Key = `${prefix}left`;
    const { UploadId } = await uploadParts(Key, [Buffer.from("part")], [1]);
    // Some servers list only uploads of the exact key as prefix.
    const listed = await client.send(new ListMultipartUploadsCommand({ Bucket: bucket, Prefix: Key }));
    expect(listed.Uploads?.map((upload) => [upload.Key, upload.UploadId])).toEqual([[Key, UploadId]]);
    await client.send(new AbortMultipartUploadCommand({ Bucket: bucket, Key, UploadId }));
    const part = client.send(new UploadPartCommand({ Bucket: bucket, Key, UploadId, PartNumber: 2, Body: Buffer.from("late") }));
    expect((await refusal(part)).name).toBe("NoSuchUpload");
    const after = await client.send(new ListMultipartUploadsCommand({ Bucket: bucket, Prefix: Key }));
    expect(after.Uploads ?? []).toEqual([]);
    expect((await refusal(client.send(new HeadObjectCommand({ Bucket: bucket, Key })))).status).toBe(404);
  });
});

describe("listing and deleting many", () => {
  it("pages through a prefix, groups by a delimiter, and deletes in one request", async () => {
    for (const name of ["list/a", "list/b/1", "list/b/2", "list/c"]) await put(name);
    const folded = await client.send(new ListObjectsV2Command({ Bucket: bucket, Prefix: `${prefix}list/`, Delimiter: "/" }));
    expect(folded.Contents?.map(({ Key }) => Key)).toEqual([`${prefix}list/a`, `${prefix}list/c`]);
    expect(folded.CommonPrefixes?.map(({ Prefix }) => Prefix)).toEqual([`${prefix}list/b/`]);
    const keys: (string | undefined)[] = [];
    let token: string | undefined;
    do {
      const page = await client.send(
        new ListObjectsV2Command({ Bucket: bucket, Prefix: `${prefix}list/`, MaxKeys: 3, ContinuationToken: token }),
      );
      keys.push(...(page.Contents ?? []).map(({ Key }) => Key));
      token = page.NextContinuationToken;
    } while (token);
    expect(keys).toEqual(["list/a", "list/b/1", "list/b/2", "list/c"].map((name) => prefix + name));
    const Delete = { Objects: keys.map((Key) => ({ Key })) };
    const gone = await client.send(new DeleteObjectsCommand({ Bucket: bucket, Delete }));
    expect(gone.Deleted?.length).toBe(4);
    const left = await client.send(new ListObjectsV2Command({ Bucket: bucket, Prefix: `${prefix}list/` }));
    expect(left.KeyCount).toBe(0);
  });
});

describe("presigned addresses", () => {
  it("take a put of exactly the signed size and type", async () => {
    const Key = `${prefix}signed`;
    const url = await presign(new PutObjectCommand({ Bucket: bucket, Key, ContentLength: 5, ContentType: "text/csv" }), [
      "content-length",
      "content-type",
    ]);
    expect((await send("PUT", url, { "content-type": "text/csv" }, "longer than five")).status).toBe(403);
    expect((await send("PUT", url, { "content-type": "text/html" }, "12345")).status).toBe(403);
    const right = await send("PUT", url, { "content-type": "text/csv" }, "12345");
    expect(right.status).toBe(200);
    expect(right.headers.etag).toBe(`"${createHash("md5").update("12345").digest("hex")}"`);
    expect(await text(Key)).toBe("12345");
  });

  it("serve parts of an upload", async () => {
    const Key = `${prefix}signed-parts`;
    const { UploadId } = await client.send(new CreateMultipartUploadCommand({ Bucket: bucket, Key }));
    const url = await presign(new UploadPartCommand({ Bucket: bucket, Key, UploadId, PartNumber: 1, ContentLength: 4 }), [
      "content-length",
    ]);
    const part = await send("PUT", url, {}, "part");
    const Parts = [{ PartNumber: 1, ETag: String(part.headers.etag) }];
    await client.send(new CompleteMultipartUploadCommand({ Bucket: bucket, Key, UploadId, MultipartUpload: { Parts } }));
    expect(await text(Key)).toBe("part");
  });

  it("name the file that a download is saved as", async () => {
    const Key = await put("download", "saved");
    const url = await presign(
      new GetObjectCommand({ Bucket: bucket, Key, ResponseContentDisposition: 'attachment; filename="bench 4.csv"' }),
    );
    const answer = await send("GET", url);
    expect([answer.status, answer.body, answer.headers["content-disposition"]]).toEqual([
      200,
      "saved",
      'attachment; filename="bench 4.csv"',
    ]);
  });

  it("are refused when expired, changed, for another method, or with a header added", async () => {
    const Key = await put("guarded", "secret");
    const get = new GetObjectCommand({ Bucket: bucket, Key });
    const url = await presign(get);
    expect((await send("GET", url)).status).toBe(200);
    expect((await send("DELETE", url)).status).toBe(403);
    expect(
      (
        await send(
          "GET",
          url.replace(/.$/, (last) => (last === "0" ? "1" : "0")),
        )
      ).status,
    ).toBe(403);
    expect((await send("GET", url.replace("guarded", "guarded2"))).status).toBe(403);
    expect((await send("GET", `${url}&response-content-type=text%2Fhtml`)).status).toBe(403);
    const old = await presign(get, [], { expiresIn: 60, signingDate: new Date(Date.now() - 3_600_000) });
    expect((await send("GET", old)).status).toBe(403);
    const putUrl = await presign(new PutObjectCommand({ Bucket: bucket, Key: `${prefix}acl`, ContentLength: 1 }), [
      "content-length",
    ]);
    expect((await send("PUT", putUrl, { "x-amz-acl": "public-read" }, "1")).status).toBe(403);
  });
});

describe("everybody else", () => {
  it("gets nothing without a signature, and nothing with a wrong secret", async () => {
    const Key = await put("private", "secret");
    const url = new URL(await presign(new GetObjectCommand({ Bucket: bucket, Key })));
    url.search = "";
    expect((await send("GET", url.href)).status).toBe(403);
    expect((await send("PUT", url.href, {}, "overwritten")).status).toBe(403);
    expect((await send("DELETE", url.href)).status).toBe(403);
    const forged = await presign(new GetObjectCommand({ Bucket: bucket, Key }), [], { secret: "not the secret key" });
    expect((await send("GET", forged)).status).toBe(403);
    expect(await text(Key)).toBe("secret");
  });
});

describe("pages of the application", () => {
  const origin = new URL(process.env.APP_URL ?? "http://127.0.0.1:3000").origin;

  it("may put and read across origins, with the ETag and the range in sight", async () => {
    const Key = await put("cors", "0123456789");
    const url = await presign(new GetObjectCommand({ Bucket: bucket, Key }));
    const ask = { origin, "access-control-request-method": "PUT", "access-control-request-headers": "content-type" };
    const preflight = await send("OPTIONS", url, ask);
    expect(preflight.status).toBeLessThan(300);
    expect(preflight.headers["access-control-allow-origin"]).toBe(origin);
    expect(preflight.headers["access-control-allow-methods"]).toContain("PUT");
    const answer = await send("GET", url, { origin, range: "bytes=0-3" });
    expect(answer.headers["access-control-allow-origin"]).toBe(origin);
    const exposed = String(answer.headers["access-control-expose-headers"]).toLowerCase();
    expect(exposed).toContain("etag");
    expect(exposed).toContain("content-range");
  });

  it("of other sites may not", async () => {
    const Key = await put("foreign");
    const url = await presign(new GetObjectCommand({ Bucket: bucket, Key }));
    const preflight = await send("OPTIONS", url, { origin: "https://elsewhere.example", "access-control-request-method": "PUT" });
    expect(preflight.headers["access-control-allow-origin"]).toBeUndefined();
    const answer = await send("GET", url, { origin: "https://elsewhere.example" });
    expect(answer.headers["access-control-allow-origin"]).toBeUndefined();
  });
});
