// In: a request with a body. Out: the body in a file, measured and checked against everything the client said about it.

import { createHash } from "node:crypto";
import { open } from "node:fs/promises";
import type { IncomingMessage } from "node:http";
import { type Checksum, type ChecksumName, checksumKind, startDigest } from "./storage-checksum";
import { StorageError } from "./storage-error";

export interface Received {
  readonly size: number;
  /** hex */
  readonly md5: string;
  readonly checksum?: Checksum;
}

const UNSIGNED = "UNSIGNED-PAYLOAD";
const CHUNKED = "STREAMING-UNSIGNED-PAYLOAD-TRAILER";
const LARGEST = 5 * 1024 ** 3;

/** Streams the body into `file`. `payload` is what the signature says about the body; a lie in any check is refused. */
export async function receive(
  request: IncomingMessage,
  query: ReadonlyMap<string, string>,
  payload: string,
  file: string,
): Promise<Received> {
  const expected = expectations(request, query, payload);
  const trailers = new Map<string, string>();
  const body = payload === CHUNKED ? unchunk(request, trailers) : request;
  const md5 = createHash("md5");
  const sha256 = expected.sha256 === undefined ? undefined : createHash("sha256");
  const digests = new Map([...expected.kinds].map((name) => [name, startDigest(name)]));
  let size = 0;
  const handle = await open(file, "w");
  try {
    for await (const bytes of body as AsyncIterable<Buffer>) {
      size += bytes.length;
      if (size > LARGEST) throw new StorageError("EntityTooLarge", "One request carries at most 5 GiB.");
      md5.update(bytes);
      sha256?.update(bytes);
      for (const digest of digests.values()) digest.update(bytes);
      await handle.write(bytes);
    }
  } catch (error) {
    if (error instanceof StorageError || !request.destroyed) throw error;
    throw new StorageError("IncompleteBody", "The connection ended before the whole body had come.");
  } finally {
    await handle.close();
  }
  if (expected.size !== size)
    throw new StorageError("IncompleteBody", `The body has ${size} bytes, but ${expected.size} were announced.`);
  const hex = md5.digest("hex");
  if (expected.md5 !== undefined && Buffer.from(hex, "hex").toString("base64") !== expected.md5) {
    throw new StorageError("BadDigest", "The Content-MD5 does not fit the body.");
  }
  if (sha256 && sha256.digest("hex") !== expected.sha256) {
    throw new StorageError("XAmzContentSHA256Mismatch", "The x-amz-content-sha256 does not fit the body.");
  }
  let checksum: Checksum | undefined;
  for (const [name, digest] of digests) {
    const value = digest.value();
    const told = expected.checksums.get(name) ?? trailers.get(`x-amz-checksum-${name}`);
    if (told !== value)
      throw new StorageError("BadDigest", `The ${name.toUpperCase()} you specified did not match the calculated checksum.`);
    checksum = { name, value };
  }
  return { size, md5: hex, checksum };
}

interface Expectations {
  readonly size: number;
  readonly md5?: string;
  readonly sha256?: string;
  readonly checksums: ReadonlyMap<ChecksumName, string>;
  /** Every checksum to compute: told in a header or the query, or promised as a trailer. */
  readonly kinds: ReadonlySet<ChecksumName>;
}

function expectations(request: IncomingMessage, query: ReadonlyMap<string, string>, payload: string): Expectations {
  const { headers } = request;
  if (payload.startsWith("STREAMING-") && payload !== CHUNKED)
    throw new StorageError("NotImplemented", `${payload} is not served here.`);
  const hash = payload === UNSIGNED || payload === CHUNKED ? undefined : payload;
  const length = payload === CHUNKED ? headers["x-amz-decoded-content-length"] : headers["content-length"];
  if (length === undefined) throw new StorageError("MissingContentLength", "You must provide the Content-Length header.");
  const checksums = new Map<ChecksumName, string>();
  const told = [...Object.entries(headers), ...query].map(([name, value]) => [name.toLowerCase(), String(value)]);
  for (const [name, value] of told) {
    const kind = checksumKind(name);
    if (kind) checksums.set(kind, value);
  }
  const promised = String(headers["x-amz-trailer"] ?? "")
    .split(",")
    .map((name) => checksumKind(name.trim()))
    .filter((name) => name !== undefined);
  return {
    size: Number(length),
    md5: headers["content-md5"] as string | undefined,
    sha256: hash,
    checksums,
    kinds: new Set([...checksums.keys(), ...promised]),
  };
}

/** The body of "Content-Encoding: aws-chunked" with an unsigned trailer: "HEX CRLF bytes CRLF ... 0 CRLF name:value CRLF CRLF". */
async function* unchunk(source: AsyncIterable<Buffer>, trailers: Map<string, string>): AsyncGenerator<Buffer> {
  let held: Buffer = Buffer.alloc(0);
  let left = -1;
  for await (const bytes of source) {
    held = held.length ? Buffer.concat([held, bytes]) : bytes;
    while (held.length) {
      if (left < 0) {
        const end = held.indexOf("\r\n");
        if (end < 0) break;
        const line = held.subarray(0, end).toString("latin1");
        held = held.subarray(end + 2);
        left = chunkLine(line, left, trailers);
      } else if (left > 0) {
        const take = held.subarray(0, left);
        held = held.subarray(take.length);
        left -= take.length;
        yield take;
        if (left === 0) left = AFTER_DATA;
      }
    }
  }
}

const BEFORE_SIZE = -1;
const AFTER_DATA = -2;
const IN_TRAILER = -3;

/** Reads one line between chunks; the answer is the bytes to come, or a negative state. */
function chunkLine(line: string, state: number, trailers: Map<string, string>): number {
  if (state === AFTER_DATA) {
    if (line !== "") throw new StorageError("IncompleteBody", "A chunk is longer than its announced size.");
    return BEFORE_SIZE;
  }
  if (state === IN_TRAILER) {
    const colon = line.indexOf(":");
    if (colon > 0) trailers.set(line.slice(0, colon).trim().toLowerCase(), line.slice(colon + 1).trim());
    return IN_TRAILER;
  }
  const size = /^[0-9a-fA-F]{1,8}(;.*)?$/.test(line) ? Number.parseInt(line, 16) : Number.NaN;
  if (Number.isNaN(size)) throw new StorageError("IncompleteBody", "The size of a chunk cannot be read.");
  return size === 0 ? IN_TRAILER : size;
}
