// In: a call about one object. Out: PutObject, CopyObject, GetObject, HeadObject and DeleteObject.

import { createReadStream } from "node:fs";
import { copyFile, rm } from "node:fs/promises";
import { pipeline } from "node:stream/promises";
import { receive } from "./storage-body";
import { bareTag, bucketOf, type Call, checkWriteCondition, descriptionOf, header, sendNothing, sendXml } from "./storage-call";
import type { StoredObject } from "./storage-disk";
import { StorageError } from "./storage-error";
import { xmlDocument } from "./storage-xml";

const ANSWER_HEADERS = ["content-type", "content-disposition", "content-encoding", "cache-control"];

export async function putObject(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  if (Buffer.byteLength(call.key) > 1024) throw new StorageError("KeyTooLongError", "A key has at most 1024 bytes.");
  if (header(call, "x-amz-copy-source") !== undefined) return copyObject(call);
  const file = bucket.incoming();
  try {
    const body = await receive(call.request, call.query, call.payload, file);
    const stored = await bucket.inTurn(call.key, async () => {
      checkWriteCondition(call, bucket.objects.get(call.key));
      const { size, md5, checksum } = body;
      return bucket.put(file, { ...descriptionOf(call), key: call.key, size, etag: md5, modified: Date.now(), checksum });
    });
    sendNothing(call, 200, { ETag: `"${stored.etag}"`, ...checksumHeader(stored) });
  } finally {
    await rm(file, { force: true });
  }
}

async function copyObject(call: Call): Promise<void> {
  const from = decodeURIComponent((header(call, "x-amz-copy-source") ?? "").replace(/^\//, ""));
  const slash = from.indexOf("/");
  const source = call.disk.buckets.get(from.slice(0, slash));
  const object = source?.objects.get(from.slice(slash + 1));
  if (!source || !object) throw new StorageError("NoSuchKey", "There is no object to copy.");
  const bucket = bucketOf(call);
  const file = bucket.incoming();
  try {
    await copyFile(source.dataFile(object), file);
    const replaced = header(call, "x-amz-metadata-directive") === "REPLACE" ? descriptionOf(call) : {};
    const copy = await bucket.inTurn(call.key, () =>
      bucket.put(file, { ...object, ...replaced, key: call.key, modified: Date.now() }),
    );
    sendXml(
      call,
      xmlDocument("CopyObjectResult", { LastModified: new Date(copy.modified).toISOString(), ETag: `"${copy.etag}"` }),
    );
  } finally {
    await rm(file, { force: true });
  }
}

export async function getObject(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  const object = bucket.objects.get(call.key);
  if (!object) throw new StorageError("NoSuchKey", "The specified key does not exist.");
  checkReadCondition(call, object);
  const range = readRange(header(call, "range"), object.size);
  if (range === "unsatisfiable") {
    call.response.setHeader("Content-Range", `bytes */${object.size}`);
    throw new StorageError("InvalidRange", "The requested range is not satisfiable.");
  }
  const { first, last } = range ?? { first: 0, last: object.size - 1 };
  const headers = answerHeaders(call, object);
  headers["Content-Length"] = String(last - first + 1);
  if (range) headers["Content-Range"] = `bytes ${first}-${last}/${object.size}`;
  call.response.writeHead(range ? 206 : 200, headers);
  if (call.request.method === "HEAD" || object.size === 0) {
    call.response.end();
    return;
  }
  const end = call.cutAfter === undefined ? last : Math.min(last, first + call.cutAfter - 1);
  const bytes = createReadStream(bucket.dataFile(object), { start: first, end });
  await pipeline(bytes, call.response, { end: end === last });
  if (end < last) call.request.socket.destroy();
}

export async function deleteObject(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  await bucket.inTurn(call.key, () => bucket.remove(call.key));
  sendNothing(call, 204);
}

function checkReadCondition(call: Call, object: StoredObject): void {
  const wanted = header(call, "if-match");
  if (wanted !== undefined && wanted !== "*" && bareTag(wanted) !== object.etag) {
    throw new StorageError("PreconditionFailed", "The object is another one now.");
  }
  const known = header(call, "if-none-match");
  if (known !== undefined && (known === "*" || bareTag(known) === object.etag)) {
    call.response.setHeader("ETag", `"${object.etag}"`);
    throw new StorageError("NotModified", "The object is the one you have.");
  }
}

/** One range of RFC 9110 section 14.1.2; several at once, and what cannot be read, are answered with the whole object. */
function readRange(text: string | undefined, size: number): { first: number; last: number } | "unsatisfiable" | undefined {
  const match = /^bytes=(\d*)-(\d*)$/.exec(text ?? "");
  if (!match || (match[1] === "" && match[2] === "")) return undefined;
  if (match[1] === "") {
    const count = Number(match[2]);
    return count === 0 || size === 0 ? "unsatisfiable" : { first: Math.max(0, size - count), last: size - 1 };
  }
  const first = Number(match[1]);
  const last = match[2] === "" ? size - 1 : Math.min(Number(match[2]), size - 1);
  if (match[2] !== "" && Number(match[2]) < first) return undefined;
  return first >= size ? "unsatisfiable" : { first, last };
}

function answerHeaders(call: Call, object: StoredObject): Record<string, string> {
  const headers: Record<string, string> = {
    "Accept-Ranges": "bytes",
    ETag: `"${object.etag}"`,
    "Last-Modified": new Date(object.modified).toUTCString(),
    "Content-Type": object.contentType,
    ...object.headers,
  };
  if (header(call, "x-amz-checksum-mode") === "ENABLED" && header(call, "range") === undefined)
    Object.assign(headers, checksumHeader(object));
  for (const name of ANSWER_HEADERS) {
    const override = call.query.get(`response-${name}`);
    if (override === undefined) continue;
    delete headers["Content-Type".toLowerCase() === name ? "Content-Type" : name];
    headers[name] = override;
  }
  return headers;
}

function checksumHeader(object: StoredObject): Record<string, string> {
  return object.checksum ? { [`x-amz-checksum-${object.checksum.name}`]: object.checksum.value } : {};
}
