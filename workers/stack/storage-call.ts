// In: nothing. Out: what every operation of the storage fake gets, and the small answers they share.

import { createHash } from "node:crypto";
import type { IncomingMessage, ServerResponse } from "node:http";
import type { Bucket, Description, Disk, StoredObject } from "./storage-disk";
import { StorageError } from "./storage-error";

export interface Call {
  readonly request: IncomingMessage;
  readonly response: ServerResponse;
  readonly disk: Disk;
  readonly region: string;
  readonly bucketName: string;
  readonly key: string;
  readonly query: ReadonlyMap<string, string>;
  /** What the signature says about the body. */
  readonly payload: string;
  /** Ends the connection after that many bytes of an answer's body: for tests of broken lines. */
  readonly cutAfter?: number;
}

export function bucketOf(call: Call): Bucket {
  const bucket = call.disk.buckets.get(call.bucketName);
  if (!bucket) throw new StorageError("NoSuchBucket", `The bucket ${call.bucketName} does not exist.`);
  return bucket;
}

export function header(call: Call, name: string): string | undefined {
  const value = call.request.headers[name];
  return Array.isArray(value) ? value.join(",") : value;
}

/** What the client says about the object it puts or begins. */
export function descriptionOf(call: Call): Description {
  const headers: Record<string, string> = {};
  for (const [name, value] of Object.entries(call.request.headers)) {
    const kept =
      name.startsWith("x-amz-meta-") || name === "content-disposition" || name === "cache-control" || name === "content-encoding";
    if (kept && typeof value === "string") headers[name] = value;
  }
  // The transport's own coding is not the object's.
  const coding = headers["content-encoding"]
    ?.split(",")
    .map((word) => word.trim())
    .filter((word) => word !== "aws-chunked")
    .join(",");
  if (coding) headers["content-encoding"] = coding;
  else delete headers["content-encoding"];
  return { contentType: header(call, "content-type") ?? "application/octet-stream", headers };
}

/** Refuses a write that is conditional on the object being absent, or on being a certain one. */
export function checkWriteCondition(call: Call, existing: StoredObject | undefined): void {
  const absent = header(call, "if-none-match");
  if (absent !== undefined && absent !== "*") throw new StorageError("NotImplemented", "A write takes only If-None-Match: *.");
  if (absent === "*" && existing)
    throw new StorageError("PreconditionFailed", "At least one of the pre-conditions you specified did not hold.");
  const wanted = header(call, "if-match");
  if (wanted === undefined) return;
  if (!existing) throw new StorageError("NoSuchKey", "There is no object to match.");
  if (bareTag(wanted) !== existing.etag)
    throw new StorageError("PreconditionFailed", "At least one of the pre-conditions you specified did not hold.");
}

export function bareTag(tag: string): string {
  return tag.trim().replace(/^"|"$/g, "");
}

/** A whole number from the query within bounds. */
export function queryNumber(call: Call, name: string, fallback: number, most: number): number {
  const text = call.query.get(name);
  if (text === undefined || text === "") return fallback;
  const value = Number(text);
  if (!Number.isInteger(value) || value < 0) throw new StorageError("InvalidArgument", `${name} must be a whole number.`);
  return Math.min(value, most);
}

export function sendXml(call: Call, text: string, status = 200): void {
  call.response.writeHead(status, { "Content-Type": "application/xml", "Content-Length": Buffer.byteLength(text) });
  call.response.end(text);
}

export function sendNothing(call: Call, status: number, headers: Record<string, string> = {}): void {
  call.response.writeHead(status, status === 204 ? headers : { "Content-Length": "0", ...headers });
  call.response.end();
}

/** The body of a small XML request, bounded and checked against its signed hash. */
export async function readText(call: Call): Promise<string> {
  const pieces: Buffer[] = [];
  let size = 0;
  for await (const piece of call.request as AsyncIterable<Buffer>) {
    size += piece.length;
    if (size > 2_000_000) throw new StorageError("MalformedXML", "The document is too long.");
    pieces.push(piece);
  }
  const body = Buffer.concat(pieces);
  if (/^[0-9a-f]{64}$/.test(call.payload) && createHash("sha256").update(body).digest("hex") !== call.payload) {
    throw new StorageError("XAmzContentSHA256Mismatch", "The x-amz-content-sha256 does not fit the body.");
  }
  return body.toString("utf8");
}
