// In: S3_* of the environment. Out: the storage server under test, through the SDK and as plain HTTP.

import http, { type IncomingHttpHeaders } from "node:http";
import https from "node:https";
import {
  CreateMultipartUploadCommand,
  type GetObjectCommand,
  type PutObjectCommand,
  S3Client,
  type S3ClientConfig,
  S3ServiceException,
  UploadPartCommand,
} from "@aws-sdk/client-s3";
import { getSignedUrl } from "@aws-sdk/s3-request-presigner";

function setting(name: string): string {
  const value = process.env[name];
  if (!value) throw new Error(`Storage tests need ${name}; "npm test" sets it, "npm run storage-contract" takes yours.`);
  return value;
}

export const bucket = setting("S3_BUCKET");

function options(secret = setting("S3_SECRET_KEY")): S3ClientConfig {
  return {
    endpoint: setting("S3_ENDPOINT"),
    region: process.env.S3_REGION || "us-east-1",
    forcePathStyle: true,
    credentials: { accessKeyId: setting("S3_ACCESS_KEY"), secretAccessKey: secret },
    requestChecksumCalculation: "WHEN_REQUIRED",
    responseChecksumValidation: "WHEN_REQUIRED",
    maxAttempts: 1,
  };
}

export const client = new S3Client(options());

/** A client as somebody gets it who sets nothing: with the SDK's own checksums on everything. */
export const eagerClient = new S3Client({
  ...options(),
  requestChecksumCalculation: "WHEN_SUPPORTED",
  responseChecksumValidation: "WHEN_SUPPORTED",
});

interface Signing {
  readonly expiresIn?: number;
  readonly signingDate?: Date;
  readonly secret?: string;
}

/** An address signed for one request; `covered` headers must be sent exactly so. */
export function presign(
  command: GetObjectCommand | PutObjectCommand | UploadPartCommand,
  covered: readonly string[] = [],
  { secret, ...signing }: Signing = {},
): Promise<string> {
  const signer = secret === undefined ? client : new S3Client(options(secret));
  return getSignedUrl(signer, command as GetObjectCommand, {
    expiresIn: 300,
    ...signing,
    signableHeaders: new Set(["host", ...covered]),
  });
}

export interface PlainAnswer {
  readonly status: number;
  readonly headers: IncomingHttpHeaders;
  readonly body: string;
}

/** A request as any program could send it: nothing added, every header allowed, unlike fetch. */
export function send(
  method: string,
  url: string,
  headers: Record<string, string> = {},
  body?: string | Buffer,
): Promise<PlainAnswer> {
  const length = body === undefined ? {} : { "content-length": String(Buffer.byteLength(body)) };
  return new Promise((resolve, reject) => {
    const request = (url.startsWith("https:") ? https : http).request(
      url,
      { method, headers: { ...length, ...headers } },
      (response) => {
        const pieces: Buffer[] = [];
        response.on("data", (piece: Buffer) => pieces.push(piece));
        response.on("end", () =>
          resolve({ status: response.statusCode ?? 0, headers: response.headers, body: Buffer.concat(pieces).toString("utf8") }),
        );
        response.on("error", reject);
      },
    );
    request.on("error", reject);
    request.end(body);
  });
}

/** How a server refused: status and the code it names. */
export async function refusal(asked: Promise<unknown>): Promise<{ status: number; name: string }> {
  try {
    await asked;
  } catch (error) {
    if (error instanceof S3ServiceException) return { status: error.$metadata.httpStatusCode ?? 0, name: error.name };
    throw error;
  }
  throw new Error("The server did what it should have refused.");
}

/** Begins an upload and sends its parts in the given order (numbers from 1); the tags come back in ascending order. */
export async function uploadParts(
  Key: string,
  bodies: readonly Buffer[],
  order: readonly number[],
): Promise<{ UploadId: string | undefined; parts: { PartNumber: number; ETag: string | undefined }[] }> {
  const { UploadId } = await client.send(new CreateMultipartUploadCommand({ Bucket: bucket, Key }));
  const parts: { PartNumber: number; ETag: string | undefined }[] = [];
  for (const PartNumber of order) {
    const Body = bodies[PartNumber - 1];
    const { ETag } = await client.send(new UploadPartCommand({ Bucket: bucket, Key, UploadId, PartNumber, Body }));
    parts.push({ PartNumber, ETag });
  }
  return { UploadId, parts: parts.sort((a, b) => a.PartNumber - b.PartNumber) };
}
