// In: a call about an upload in parts. Out: create, part, list, complete, abort, as a resumable upload needs them.

import { createHash } from "node:crypto";
import { createReadStream } from "node:fs";
import { open, rm } from "node:fs/promises";
import { receive } from "./storage-body";
import {
  bareTag,
  bucketOf,
  type Call,
  checkWriteCondition,
  descriptionOf,
  queryNumber,
  readText,
  sendNothing,
  sendXml,
} from "./storage-call";
import type { Bucket, StoredPart, Upload } from "./storage-disk";
import { StorageError } from "./storage-error";
import { xmlDocument, xmlElements, xmlText } from "./storage-xml";

const SMALLEST_PART = 5 * 1024 * 1024;
const MOST_PARTS = 10_000;

export async function createUpload(call: Call): Promise<void> {
  const upload = await bucketOf(call).begin(call.key, descriptionOf(call));
  sendXml(call, xmlDocument("InitiateMultipartUploadResult", { Bucket: call.bucketName, Key: call.key, UploadId: upload.id }));
}

export async function uploadPart(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  const upload = uploadOf(call, bucket);
  const number = Number(call.query.get("partNumber"));
  if (!Number.isInteger(number) || number < 1 || number > MOST_PARTS) {
    throw new StorageError("InvalidArgument", `Part number must be an integer between 1 and ${MOST_PARTS}, inclusive.`);
  }
  const file = bucket.incoming();
  try {
    const { size, md5, checksum } = await receive(call.request, call.query, call.payload, file);
    await bucket.inTurn(`upload ${upload.id}`, async () => {
      // It may have been completed or aborted while the bytes came in.
      uploadOf(call, bucket);
      await bucket.putPart(upload, file, { number, size, etag: md5, modified: Date.now(), checksum });
    });
    const told = checksum ? { [`x-amz-checksum-${checksum.name}`]: checksum.value } : {};
    sendNothing(call, 200, { ETag: `"${md5}"`, ...told });
  } finally {
    await rm(file, { force: true });
  }
}

export async function listParts(call: Call): Promise<void> {
  const upload = uploadOf(call, bucketOf(call));
  const most = queryNumber(call, "max-parts", 1000, 1000);
  const after = queryNumber(call, "part-number-marker", 0, MOST_PARTS);
  const rest = sortedParts(upload).filter((part) => part.number > after);
  const page = rest.slice(0, most);
  sendXml(
    call,
    xmlDocument("ListPartsResult", {
      Bucket: call.bucketName,
      Key: call.key,
      UploadId: upload.id,
      PartNumberMarker: after,
      NextPartNumberMarker: page.at(-1)?.number,
      MaxParts: most,
      IsTruncated: rest.length > page.length,
      Part: page.map((part) => ({
        PartNumber: part.number,
        LastModified: new Date(part.modified).toISOString(),
        ETag: `"${part.etag}"`,
        Size: part.size,
      })),
    }),
  );
}

export async function listUploads(call: Call): Promise<void> {
  const prefix = call.query.get("prefix") ?? "";
  const most = queryNumber(call, "max-uploads", 1000, 1000);
  const marker = [call.query.get("key-marker") ?? "", call.query.get("upload-id-marker") ?? ""].join("\0");
  const rest = [...bucketOf(call).uploads.values()]
    .filter((upload) => upload.key.startsWith(prefix) && [upload.key, upload.id].join("\0") > marker)
    .sort((a, b) => (a.key === b.key ? (a.id < b.id ? -1 : 1) : a.key < b.key ? -1 : 1));
  const page = rest.slice(0, most);
  sendXml(
    call,
    xmlDocument("ListMultipartUploadsResult", {
      Bucket: call.bucketName,
      Prefix: prefix,
      MaxUploads: most,
      NextKeyMarker: page.at(-1)?.key,
      NextUploadIdMarker: page.at(-1)?.id,
      IsTruncated: rest.length > page.length,
      Upload: page.map((upload) => ({ Key: upload.key, UploadId: upload.id, Initiated: new Date(upload.started).toISOString() })),
    }),
  );
}

export async function completeUpload(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  const upload = uploadOf(call, bucket);
  const text = await readText(call);
  const etag = await bucket.inTurn(`upload ${upload.id}`, async () => {
    const parts = chosenParts(uploadOf(call, bucket), text);
    const file = bucket.incoming();
    try {
      await join(
        parts.map((part) => bucket.partFile(upload, part)),
        file,
      );
      await bucket.inTurn(call.key, async () => {
        checkWriteCondition(call, bucket.objects.get(call.key));
        const { contentType, headers } = upload;
        const size = parts.reduce((sum, part) => sum + part.size, 0);
        await bucket.put(file, { contentType, headers, key: call.key, size, etag: joinedTag(parts), modified: Date.now() });
      });
    } finally {
      await rm(file, { force: true });
    }
    await bucket.forget(upload);
    return joinedTag(parts);
  });
  const location = `http://${call.request.headers.host}/${call.bucketName}/${encodeURI(call.key)}`;
  sendXml(
    call,
    xmlDocument("CompleteMultipartUploadResult", {
      Location: location,
      Bucket: call.bucketName,
      Key: call.key,
      ETag: `"${etag}"`,
    }),
  );
}

export async function abortUpload(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  const upload = uploadOf(call, bucket);
  await bucket.inTurn(`upload ${upload.id}`, () => bucket.forget(upload));
  sendNothing(call, 204);
}

function uploadOf(call: Call, bucket: Bucket): Upload {
  const upload = bucket.uploads.get(call.query.get("uploadId") ?? "");
  if (upload?.key === call.key) return upload;
  throw new StorageError("NoSuchUpload", "The specified upload does not exist: it may have been completed or aborted.");
}

function sortedParts(upload: Upload): StoredPart[] {
  return [...upload.parts.values()].sort((a, b) => a.number - b.number);
}

/** The parts that the client lists, checked as S3 does: known, unchanged, in order, none but the last too small. */
function chosenParts(upload: Upload, text: string): StoredPart[] {
  const listed = xmlElements(text, "Part").map((part) => ({
    number: Number(xmlText(part, "PartNumber")),
    etag: bareTag(xmlText(part, "ETag")),
  }));
  if (!listed.length) throw new StorageError("MalformedXML", "The document lists no parts.");
  if (listed.some(({ number }, index) => index > 0 && number <= listed[index - 1].number)) {
    throw new StorageError("InvalidPartOrder", "The parts must be listed in ascending order.");
  }
  return listed.map(({ number, etag }, index) => {
    const part = upload.parts.get(number);
    if (part?.etag !== etag)
      throw new StorageError("InvalidPart", `Part ${number} was not uploaded, or is another one than listed.`);
    if (index < listed.length - 1 && part.size < SMALLEST_PART) {
      throw new StorageError("EntityTooSmall", `Part ${number} is smaller than 5 MiB and not the last.`);
    }
    return part;
  });
}

/** S3's tag of an object made of parts: the md5 of the parts' md5s, and their number. */
function joinedTag(parts: readonly StoredPart[]): string {
  const all = createHash("md5");
  for (const part of parts) all.update(Buffer.from(part.etag, "hex"));
  return `${all.digest("hex")}-${parts.length}`;
}

async function join(files: readonly string[], target: string): Promise<void> {
  const handle = await open(target, "w");
  try {
    for (const file of files) {
      for await (const bytes of createReadStream(file, { highWaterMark: 1 << 20 })) await handle.write(bytes);
    }
  } finally {
    await handle.close();
  }
}
