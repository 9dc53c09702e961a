// In: a folder and keys. Out: an S3-compatible server on loopback, for starting without a cloud and for tests.
// It serves what the application uses and answers 501 to the rest; it lets nothing through that a real server would refuse.

import { createHash, randomUUID, timingSafeEqual } from "node:crypto";
import http, { type IncomingMessage, type ServerResponse } from "node:http";
import { Complaint, systemCode } from "./complaint";
import { createBucket, deleteBucket, deleteObjects, headBucket, listBuckets, listObjects, locateBucket } from "./storage-bucket";
import type { Call } from "./storage-call";
import { Disk } from "./storage-disk";
import { StorageError } from "./storage-error";
import { type Asked, type Fault, Faults } from "./storage-fault";
import { abortUpload, completeUpload, createUpload, listParts, listUploads, uploadPart } from "./storage-multipart";
import { deleteObject, getObject, putObject } from "./storage-object";
import { type Keys, verify } from "./storage-signature";
import { xmlDocument } from "./storage-xml";

export interface StorageWish extends Keys {
  readonly folder: string;
  readonly port: number;
  readonly bucket: string;
  /** Origins whose pages may read answers: the application's own. */
  readonly origins: readonly string[];
  /** For tests: also answer POST /-/faults, POST /-/calm and GET /-/requests, to whoever sends the secret key as a bearer token. */
  readonly controls?: boolean;
}

export interface Storage {
  readonly endpoint: string;
  readonly faults: Faults;
  stop(): Promise<void>;
}

const METHODS = "GET, HEAD, PUT, POST, DELETE";
const EXPOSED = "ETag, Content-Range, Content-Length, Accept-Ranges, x-amz-request-id, x-amz-checksum-crc32";

/** Starts the server; makes the bucket when it is not there. */
export async function startStorage(wish: StorageWish): Promise<Storage> {
  const disk = new Disk(wish.folder);
  await disk.load();
  if (!disk.buckets.has(wish.bucket)) await disk.create(wish.bucket);
  const faults = new Faults();
  const server = http.createServer((request, response) => void answer(request, response, wish, disk, faults));
  // A part may take long on a slow line.
  server.requestTimeout = 0;
  // But not stand still: S3 gives up an idle connection after about 20 seconds too.
  server.timeout = 20_000;
  server.keepAliveTimeout = 30_000;
  await listen(server, wish.port);
  return {
    endpoint: `http://127.0.0.1:${wish.port}`,
    faults,
    stop: () =>
      new Promise((resolve) => {
        server.close(() => resolve());
        server.closeAllConnections();
      }),
  };
}

export function listen(server: http.Server, port: number): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once("error", (error) =>
      reject(
        systemCode(error) === "EADDRINUSE"
          ? new Complaint(
              `Port ${port} was taken by another program at this moment.`,
              "Start again; another port will be chosen.",
            )
          : error,
      ),
    );
    server.listen(port, "127.0.0.1", resolve);
  });
}

async function answer(
  request: IncomingMessage,
  response: ServerResponse,
  wish: StorageWish,
  disk: Disk,
  faults: Faults,
): Promise<void> {
  response.setHeader("x-amz-request-id", randomUUID());
  const { path, query } = parseTarget(request.url ?? "/");
  const asked = glance(request, path, query);
  try {
    if (allowOrigin(request, response, wish.origins)) return;
    if (wish.controls && path.startsWith("/-/")) {
      await control(request, response, path, wish, faults);
      return;
    }
    faults.record(asked, response);
    const fault = faults.meet(asked);
    const payload = verify({ method: request.method ?? "GET", path, query, headers: request.headers }, wish, Date.now());
    if (await suffer(request, fault)) return;
    const [bucketName, ...rest] = path.slice(1).split("/");
    const key = rest.map(decodeURIComponent).join("/");
    const call: Call = {
      request,
      response,
      disk,
      region: wish.region,
      bucketName,
      key,
      query: new Map(query),
      payload,
      cutAfter: fault?.cutAfter,
    };
    await operation(call)(call);
  } catch (error) {
    fail(request, response, error);
  }
}

function parseTarget(target: string): { path: string; query: [string, string][] } {
  const mark = target.indexOf("?");
  const path = mark < 0 ? target : target.slice(0, mark);
  const pairs = mark < 0 ? [] : target.slice(mark + 1).split("&");
  const query = pairs.filter(Boolean).map((pair): [string, string] => {
    const equals = pair.indexOf("=");
    const [name, value] = equals < 0 ? [pair, ""] : [pair.slice(0, equals), pair.slice(equals + 1)];
    return [decode(name), decode(value)];
  });
  return { path, query };
}

/** Unlike a form's, a signed query's plus sign is a plus sign. */
function decode(text: string): string {
  try {
    return decodeURIComponent(text);
  } catch {
    return text;
  }
}

function glance(request: IncomingMessage, path: string, query: readonly (readonly [string, string])[]): Asked {
  const part = new Map(query).get("partNumber");
  return {
    method: request.method ?? "GET",
    key: decode(path.split("/").slice(2).join("/")),
    part: part === undefined ? undefined : Number(part),
  };
}

/** Cross-origin rules. True when the request was a preflight and is answered. */
function allowOrigin(request: IncomingMessage, response: ServerResponse, origins: readonly string[]): boolean {
  const origin = request.headers.origin;
  const allowed = origin !== undefined && origins.includes(origin);
  response.setHeader("Vary", "Origin");
  if (allowed) {
    response.setHeader("Access-Control-Allow-Origin", origin);
    response.setHeader("Access-Control-Expose-Headers", EXPOSED);
  }
  if (request.method !== "OPTIONS") return false;
  if (!allowed) throw new StorageError("AccessDenied", "CORSResponse: This CORS request is not allowed.");
  response.writeHead(200, {
    "Access-Control-Allow-Methods": METHODS,
    "Access-Control-Allow-Headers": request.headers["access-control-request-headers"] ?? "",
    "Access-Control-Max-Age": "600",
    "Content-Length": "0",
  });
  response.end();
  return true;
}

type Operation = (call: Call) => Promise<void>;

/** Which operation a request asks for. */
function operation(call: Call): Operation {
  const { method } = call.request;
  const asked = (name: string) => call.query.has(name);
  const known: Record<string, Operation | undefined> = call.key
    ? {
        PUT: asked("uploadId") ? uploadPart : putObject,
        GET: asked("uploadId") ? listParts : getObject,
        HEAD: getObject,
        DELETE: asked("uploadId") ? abortUpload : deleteObject,
        POST: asked("uploads") ? createUpload : asked("uploadId") ? completeUpload : undefined,
      }
    : call.bucketName
      ? {
          PUT: createBucket,
          HEAD: headBucket,
          DELETE: deleteBucket,
          GET: asked("uploads") ? listUploads : asked("location") ? locateBucket : asked("list-type") ? listObjects : undefined,
          POST: asked("delete") ? deleteObjects : undefined,
        }
      : { GET: listBuckets };
  const unknown = ["acl", "tagging", "policy", "cors", "lifecycle", "versioning", "retention", "torrent", "select"].find(asked);
  const found = unknown ? undefined : known[method ?? ""];
  if (!found)
    throw new StorageError(
      "NotImplemented",
      `${method}${unknown ? ` ?${unknown}` : ""} is not served by this small storage server.`,
    );
  return found;
}

/** Lets a planned fault happen. True when the connection was cut. */
async function suffer(request: IncomingMessage, fault: Fault | undefined): Promise<boolean> {
  if (!fault) return false;
  if (fault.delay) await new Promise((resolve) => setTimeout(resolve, fault.delay));
  if (fault.refuse) throw new StorageError(fault.refuse, "Refused on purpose, by a test.");
  if (fault.cutAfter === undefined || request.method === "GET") return false;
  let size = 0;
  // Leaving the loop takes the socket off the request.
  const { socket } = request;
  for await (const bytes of request as AsyncIterable<Buffer>) {
    size += bytes.length;
    if (size >= fault.cutAfter) break;
  }
  socket.destroy();
  return true;
}

function fail(request: IncomingMessage, response: ServerResponse, error: unknown): void {
  const refused = error instanceof StorageError ? error : translate(error);
  // The rest of a refused body is read and dropped, so that the client gets to read the answer.
  request.resume();
  if (response.headersSent) {
    response.destroy();
    return;
  }
  const text = xmlDocument("Error", {
    Code: refused.code,
    Message: refused.message,
    RequestId: String(response.getHeader("x-amz-request-id")),
  });
  const bare = request.method === "HEAD" || refused.status === 304;
  response.writeHead(
    refused.status,
    bare ? {} : { "Content-Type": "application/xml", "Content-Length": Buffer.byteLength(text) },
  );
  response.end(bare ? undefined : text);
}

function translate(error: unknown): StorageError {
  const code = systemCode(error);
  if (code === "ENOSPC") console.error("The storage folder's disk is full: uploads are refused until there is space.");
  else if (code !== "ERR_STREAM_PREMATURE_CLOSE" && code !== "ECONNRESET") console.error("Storage:", error);
  return new StorageError(
    "InternalError",
    code === "ENOSPC" ? "The disk is full." : "We encountered an internal error. Please try again.",
  );
}

async function control(
  request: IncomingMessage,
  response: ServerResponse,
  path: string,
  wish: StorageWish,
  faults: Faults,
): Promise<void> {
  const told = createHash("sha256").update(request.headers.authorization ?? "");
  const right = createHash("sha256").update(`Bearer ${wish.secretKey}`);
  if (!timingSafeEqual(told.digest(), right.digest()))
    throw new StorageError("AccessDenied", "The controls want the secret key.");
  const pieces: Buffer[] = [];
  for await (const piece of request as AsyncIterable<Buffer>) pieces.push(piece);
  if (path === "/-/faults" && request.method === "POST") faults.add(JSON.parse(Buffer.concat(pieces).toString()));
  else if (path === "/-/calm" && request.method === "POST") faults.clear();
  else if (path !== "/-/requests") throw new StorageError("MethodNotAllowed", "There is no such control.");
  response.writeHead(200, { "Content-Type": "application/json" });
  response.end(JSON.stringify(faults.requests()));
}
