// In: a request's line and headers. Out: whether it was signed with our key, and what it claims about its body.
// AWS Signature Version 4, as the "Authenticating Requests (AWS Signature Version 4)" chapter of the Amazon S3 API
// reference describes it: in the Authorization header, or in the query of a presigned address.

import { createHash, createHmac, timingSafeEqual } from "node:crypto";
import type { IncomingHttpHeaders } from "node:http";
import { StorageError } from "./storage-error";

const ALGORITHM = "AWS4-HMAC-SHA256";
const SKEW = 15 * 60_000;
const LONGEST_EXPIRY = 7 * 24 * 3600;

export interface Keys {
  readonly accessKey: string;
  readonly secretKey: string;
  readonly region: string;
}

export interface SignedRequest {
  readonly method: string;
  /** As it came on the wire, still percent-encoded. */
  readonly path: string;
  readonly query: readonly (readonly [string, string])[];
  readonly headers: IncomingHttpHeaders;
}

interface Claim {
  readonly credential: string;
  readonly signedHeaders: readonly string[];
  readonly signature: string;
  readonly date: string;
  readonly payload: string;
  readonly presigned: boolean;
}

/** Refuses anything not signed with our key; returns the body hash that the signature covers, or one of S3's words for "none". */
export function verify(request: SignedRequest, keys: Keys, now: number): string {
  const claim = readClaim(request);
  const [accessKey, day, region, service, terminator, ...rest] = claim.credential.split("/");
  if (accessKey !== keys.accessKey) throw new StorageError("InvalidAccessKeyId", "The access key is not known here.");
  if (
    rest.length ||
    service !== "s3" ||
    terminator !== "aws4_request" ||
    region !== keys.region ||
    day !== claim.date.slice(0, 8)
  ) {
    throw new StorageError(
      "SignatureDoesNotMatch",
      `The credential's scope must be ${claim.date.slice(0, 8)}/${keys.region}/s3/aws4_request.`,
    );
  }
  checkTime(request, claim, now);
  checkCoverage(request, claim);
  const scope = `${day}/${region}/s3/aws4_request`;
  const text = [ALGORITHM, claim.date, scope, sha256(canonicalRequest(request, claim))].join("\n");
  let key = hmac(`AWS4${keys.secretKey}`, day);
  for (const part of [region, "s3", "aws4_request"]) key = hmac(key, part);
  if (!same(hmac(key, text).toString("hex"), claim.signature)) {
    throw new StorageError("SignatureDoesNotMatch", "The signature is not the one that this request and the secret key give.");
  }
  return claim.payload;
}

function readClaim(request: SignedRequest): Claim {
  const query = new Map(request.query);
  const header = request.headers.authorization;
  if (header) return readHeader(header, request.headers);
  if (!query.has("X-Amz-Signature")) throw new StorageError("AccessDenied", "Anonymous requests are not served.");
  if (query.get("X-Amz-Algorithm") !== ALGORITHM) throw new StorageError("AccessDenied", `Only ${ALGORITHM} is known.`);
  return {
    credential: query.get("X-Amz-Credential") ?? "",
    signedHeaders: (query.get("X-Amz-SignedHeaders") ?? "").split(";"),
    signature: query.get("X-Amz-Signature") ?? "",
    date: query.get("X-Amz-Date") ?? "",
    payload: query.get("X-Amz-Content-Sha256") ?? "UNSIGNED-PAYLOAD",
    presigned: true,
  };
}

// "AWS4-HMAC-SHA256 Credential=KEY/20261201/us-east-1/s3/aws4_request, SignedHeaders=host;x-amz-date, Signature=9c..."
function readHeader(header: string, headers: IncomingHttpHeaders): Claim {
  const match = /^AWS4-HMAC-SHA256\s+Credential=([^,\s]+),\s*SignedHeaders=([^,\s]+),\s*Signature=([0-9a-f]+)$/.exec(header);
  if (!match) throw new StorageError("AccessDenied", "The Authorization header cannot be read.");
  const payload = one(headers["x-amz-content-sha256"]);
  if (payload === undefined) throw new StorageError("InvalidRequest", "The header x-amz-content-sha256 is missing.");
  return {
    credential: match[1],
    signedHeaders: match[2].split(";"),
    signature: match[3],
    date: one(headers["x-amz-date"]) ?? "",
    payload,
    presigned: false,
  };
}

function checkTime(request: SignedRequest, claim: Claim, now: number): void {
  const parts = /^(\d{4})(\d\d)(\d\d)T(\d\d)(\d\d)(\d\d)Z$/.exec(claim.date);
  if (!parts) throw new StorageError("AccessDenied", "The date of the signature cannot be read.");
  const [year, month, day, hour, minute, second] = parts.slice(1).map(Number);
  const signed = Date.UTC(year, month - 1, day, hour, minute, second);
  if (!claim.presigned) {
    if (Math.abs(now - signed) > SKEW)
      throw new StorageError("RequestTimeTooSkewed", "The signature's time is more than 15 minutes away.");
    return;
  }
  const expires = Number(new Map(request.query).get("X-Amz-Expires"));
  if (!Number.isInteger(expires) || expires < 1 || expires > LONGEST_EXPIRY) {
    throw new StorageError("AccessDenied", "X-Amz-Expires must be a whole number of seconds from 1 to 604800.");
  }
  if (signed - now > SKEW) throw new StorageError("AccessDenied", "The address is not valid yet.");
  if (now > signed + expires * 1000) throw new StorageError("AccessDenied", "Request has expired");
}

/** What changes the meaning of a request must be covered: the host, and every x-amz- header. */
function checkCoverage(request: SignedRequest, claim: Claim): void {
  const covered = new Set(claim.signedHeaders);
  const bare = Object.keys(request.headers).filter(
    (name) => name.startsWith("x-amz-") && name !== "x-amz-content-sha256" && !covered.has(name),
  );
  if (!covered.has("host")) bare.push("host");
  if (bare.length)
    throw new StorageError("AccessDenied", `There were headers present in the request which were not signed: ${bare.join(", ")}`);
}

function canonicalRequest(request: SignedRequest, claim: Claim): string {
  const path = request.path
    .split("/")
    .map((part) => encode(decodeURIComponent(part)))
    .join("/");
  const query = request.query
    .filter(([name]) => name !== "X-Amz-Signature")
    .map(([name, value]): [string, string] => [encode(name), encode(value)])
    .sort(([a, x], [b, y]) => (a === b ? order(x, y) : order(a, b)))
    .map(([name, value]) => `${name}=${value}`)
    .join("&");
  const headers = claim.signedHeaders
    .map((name) => `${name}:${(one(request.headers[name]) ?? "").trim().replace(/ +/g, " ")}\n`)
    .join("");
  return [request.method, path, query, headers, claim.signedHeaders.join(";"), claim.payload].join("\n");
}

/** Percent-encoding as signatures want it: everything but letters, digits and - . _ ~ in UTF-8 bytes. */
function encode(text: string): string {
  return encodeURIComponent(text).replace(/[!'()*]/g, (found) => `%${found.charCodeAt(0).toString(16).toUpperCase()}`);
}

function order(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}

function one(value: string | string[] | undefined): string | undefined {
  return Array.isArray(value) ? value.join(",") : value;
}

function sha256(text: string): string {
  return createHash("sha256").update(text).digest("hex");
}

function hmac(key: string | Buffer, text: string): Buffer {
  return createHmac("sha256", key).update(text).digest();
}

function same(a: string, b: string): boolean {
  return a.length === b.length && timingSafeEqual(Buffer.from(a), Buffer.from(b));
}
