// What only our own storage fake has: planned faults, its data after a restart, and the refusals that keep tests honest.

import { mkdtemp, readdir, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import path from "node:path";
import { Readable } from "node:stream";
import {
  CreateMultipartUploadCommand,
  GetObjectCommand,
  HeadObjectCommand,
  ListPartsCommand,
  PutObjectCommand,
  S3Client,
  UploadPartCommand,
} from "@aws-sdk/client-s3";
import { getSignedUrl } from "@aws-sdk/s3-request-presigner";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { anyPort } from "@/workers/stack/port";
import { type Storage, startStorage } from "@/workers/stack/storage";

const keys = { accessKey: "key", secretKey: "secret", region: "us-east-1" };
const Bucket = "captures";
let folder: string;
let storage: Storage;
let client: S3Client;

async function open(): Promise<void> {
  storage = await startStorage({ ...keys, folder, port: await anyPort(), bucket: Bucket, origins: [], controls: true });
  client = connect({ requestChecksumCalculation: "WHEN_REQUIRED", responseChecksumValidation: "WHEN_REQUIRED" });
}

function connect(more: object): S3Client {
  const credentials = { accessKeyId: keys.accessKey, secretAccessKey: keys.secretKey };
  return new S3Client({
    endpoint: storage.endpoint,
    region: keys.region,
    forcePathStyle: true,
    credentials,
    maxAttempts: 1,
    ...more,
  });
}

beforeEach(async () => {
  folder = await mkdtemp(path.join(tmpdir(), "firstlow-storage-"));
  await open();
});
afterEach(async () => {
  await storage.stop();
  await rm(folder, { recursive: true });
});

async function read(Key: string): Promise<Buffer> {
  const answer = await client.send(new GetObjectCommand({ Bucket, Key }));
  return Buffer.from((await answer.Body?.transformToByteArray()) ?? []);
}

describe("checksums that the SDK adds by itself", () => {
  it("are checked on buffered and on streamed bodies, and the transport's coding is taken off", async () => {
    const eager = connect({ requestChecksumCalculation: "WHEN_SUPPORTED" });
    await eager.send(new PutObjectCommand({ Bucket, Key: "buffered", Body: "0123456789" }));
    expect((await read("buffered")).toString()).toBe("0123456789");
    const pieces = Array.from({ length: 40 }, (_unused, index) => Buffer.alloc(10_000, index));
    const ContentLength = 400_000;
    await eager.send(new PutObjectCommand({ Bucket, Key: "streamed", Body: Readable.from(pieces), ContentLength }));
    expect((await read("streamed")).equals(Buffer.concat(pieces))).toBe(true);
  });

  it("of an empty body in a presigned address are refused, so that a wrong client setting is seen here", async () => {
    const eager = connect({ requestChecksumCalculation: "WHEN_SUPPORTED" });
    const url = await getSignedUrl(eager, new PutObjectCommand({ Bucket, Key: "presigned" }));
    expect((await fetch(url, { method: "PUT", body: "not empty" })).status).toBe(400);
  });
});

describe("a restart", () => {
  it("finds objects and unfinished uploads again, and clears what was cut off", async () => {
    await client.send(new PutObjectCommand({ Bucket, Key: "kept", Body: "kept bytes", ContentType: "text/csv" }));
    const { UploadId } = await client.send(new CreateMultipartUploadCommand({ Bucket, Key: "parts" }));
    await client.send(new UploadPartCommand({ Bucket, Key: "parts", UploadId, PartNumber: 1, Body: Buffer.from("one") }));
    await storage.stop();
    await open();
    expect((await read("kept")).toString()).toBe("kept bytes");
    expect((await client.send(new HeadObjectCommand({ Bucket, Key: "kept" }))).ContentType).toBe("text/csv");
    const listed = await client.send(new ListPartsCommand({ Bucket, Key: "parts", UploadId }));
    expect(listed.Parts?.map(({ Size }) => Size)).toEqual([3]);
  });
});

describe("planned faults", () => {
  it("cut an upload: nothing of it is stored, and the next try succeeds", async () => {
    storage.faults.add({ method: "PUT", key: "cut", cutAfter: 1000 });
    const put = () => client.send(new PutObjectCommand({ Bucket, Key: "cut", Body: Buffer.alloc(500_000, 7) }));
    await expect(put()).rejects.toThrow();
    await expect(read("cut")).rejects.toMatchObject({ name: "NoSuchKey" });
    await put();
    expect((await read("cut")).length).toBe(500_000);
    expect(await readdir(path.join(folder, Bucket, "incoming"))).toEqual([]);
  });

  it("cut an answer, refuse, and count what came, also over HTTP with the secret key only", async () => {
    await client.send(new PutObjectCommand({ Bucket, Key: "long", Body: Buffer.alloc(500_000, 7) }));
    storage.faults.add({ method: "GET", cutAfter: 1000 });
    await expect(read("long")).rejects.toThrow();
    const plan = (token: string) =>
      fetch(`${storage.endpoint}/-/faults`, {
        method: "POST",
        headers: { authorization: `Bearer ${token}` },
        body: JSON.stringify({ method: "GET", refuse: "SlowDown", times: 2 }),
      });
    expect((await plan("a guess")).status).toBe(403);
    expect((await plan(keys.secretKey)).status).toBe(200);
    await expect(read("long")).rejects.toMatchObject({ name: "SlowDown" });
    await expect(read("long")).rejects.toMatchObject({ name: "SlowDown" });
    expect((await read("long")).length).toBe(500_000);
    expect(storage.faults.requests().map(({ method, status }) => [method, status])).toEqual([
      ["PUT", 200],
      ["GET", 200],
      ["GET", 503],
      ["GET", 503],
      ["GET", 200],
    ]);
  });
});

describe("readers and writers of one key", () => {
  it("never see half of one object and half of another", async () => {
    const size = 200_000;
    const write = (value: number) => client.send(new PutObjectCommand({ Bucket, Key: "busy", Body: Buffer.alloc(size, value) }));
    await write(0);
    const writes = Array.from({ length: 15 }, (_unused, index) => write(index + 1));
    const reads = await Promise.all(Array.from({ length: 30 }, () => read("busy")));
    await Promise.all(writes);
    for (const body of reads) expect(body.equals(Buffer.alloc(size, body[0]))).toBe(true);
    expect((await readdir(path.join(folder, Bucket, "objects"))).length).toBe(2);
  });
});
