import "server-only";
import type { Readable } from "node:stream";
import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CopyObjectCommand,
  CreateBucketCommand,
  CreateMultipartUploadCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadBucketCommand,
  HeadObjectCommand,
  ListPartsCommand,
  PutObjectCommand,
  S3Client,
  S3ServiceException,
  UploadPartCommand,
} from "@aws-sdk/client-s3";
import { getSignedUrl } from "@aws-sdk/s3-request-presigner";
import { UPLOAD_LIMIT } from "@/lib/case/upload";
import { Refusal } from "@/lib/server/http/problem";
import { settings } from "@/lib/server/settings";

/** What storage knows of one part of an unfinished upload. */
export interface StoredPart {
  readonly number: number;
  readonly size: number;
  /** With its quotation marks, as S3 writes it. */
  readonly etag: string;
}

/** Stored bytes are never served as anything a browser would open. */
const OPAQUE = "application/octet-stream";

function connect(endpoint: string): S3Client {
  const { region, accessKey, secretKey } = settings().storage;
  return new S3Client({
    endpoint,
    region,
    forcePathStyle: true,
    credentials: { accessKeyId: accessKey, secretAccessKey: secretKey },
    // The default would put the checksum of an empty body into every signed address, and S3-compatible servers refuse that.
    requestChecksumCalculation: "WHEN_REQUIRED",
    responseChecksumValidation: "WHEN_REQUIRED",
  });
}

function named(error: unknown, ...names: readonly string[]): boolean {
  return (
    error instanceof S3ServiceException &&
    (names.includes(error.name) || (error.$metadata.httpStatusCode === 404 && names.includes("404")))
  );
}

/** Every word the application says to the bucket. A storage that does not answer is a refusal, never a crash. */
export class Store {
  readonly #bucket = settings().storage.bucket;
  readonly #inside = connect(settings().storage.endpoint);
  /** Signs for the address browsers use; sends nothing itself. */
  readonly #outside = connect(settings().storage.publicEndpoint);

  async #ask<T>(what: string, question: () => Promise<T>): Promise<T> {
    try {
      return await question();
    } catch (error) {
      if (error instanceof Refusal) throw error;
      console.error(`storage failed to ${what}: ${error instanceof Error ? `${error.name}: ${error.message}` : String(error)}`);
      throw new Refusal("storage-failed", { detail: what });
    }
  }

  /** Makes the bucket where there is none; for the start command. */
  ensureBucket(): Promise<void> {
    const Bucket = this.#bucket;
    return this.#ask("make the bucket", async () => {
      try {
        await this.#inside.send(new HeadBucketCommand({ Bucket }));
      } catch (error) {
        if (!named(error, "NotFound", "NoSuchBucket", "404")) throw error;
        await this.#inside.send(new CreateBucketCommand({ Bucket }));
      }
    });
  }

  /** Begins an upload in parts and returns its id in storage. */
  begin(Key: string): Promise<string> {
    return this.#ask("begin an upload", async () => {
      const answer = await this.#inside.send(
        new CreateMultipartUploadCommand({ Bucket: this.#bucket, Key, ContentType: OPAQUE }),
      );
      if (!answer.UploadId) throw new Error("storage gave no upload id");
      return answer.UploadId;
    });
  }

  /** An address to PUT exactly `size` bytes of one part to. */
  signPart(Key: string, UploadId: string, PartNumber: number, size: number): Promise<string> {
    const command = new UploadPartCommand({ Bucket: this.#bucket, Key, UploadId, PartNumber, ContentLength: size });
    return getSignedUrl(this.#outside, command, {
      expiresIn: UPLOAD_LIMIT.signed,
      signableHeaders: new Set(["host", "content-length"]),
    });
  }

  /** An address to PUT exactly `size` bytes to. */
  signPut(Key: string, size: number): Promise<string> {
    const command = new PutObjectCommand({ Bucket: this.#bucket, Key, ContentLength: size });
    return getSignedUrl(this.#outside, command, {
      expiresIn: UPLOAD_LIMIT.signed,
      signableHeaders: new Set(["host", "content-length"]),
    });
  }

  /** An address to GET from for ten minutes, saved under `name` where one is given. */
  signGet(Key: string, name?: string): Promise<string> {
    const command = new GetObjectCommand({
      Bucket: this.#bucket,
      Key,
      ResponseContentType: OPAQUE,
      ...(name === undefined ? {} : { ResponseContentDisposition: disposition(name) }),
    });
    return getSignedUrl(this.#outside, command, { expiresIn: 600 });
  }

  /** Parts that have arrived, by number; null where storage no longer knows the upload. */
  parts(Key: string, UploadId: string): Promise<readonly StoredPart[] | null> {
    return this.#ask("list parts", async () => {
      const found: StoredPart[] = [];
      let PartNumberMarker: string | undefined;
      try {
        for (;;) {
          const page = await this.#inside.send(
            new ListPartsCommand({ Bucket: this.#bucket, Key, UploadId, PartNumberMarker, MaxParts: 1000 }),
          );
          for (const part of page.Parts ?? []) {
            found.push({ number: part.PartNumber ?? 0, size: part.Size ?? 0, etag: part.ETag ?? "" });
          }
          if (!page.IsTruncated || !page.NextPartNumberMarker) return found;
          PartNumberMarker = page.NextPartNumberMarker;
        }
      } catch (error) {
        if (named(error, "NoSuchUpload", "404")) return null;
        throw error;
      }
    });
  }

  /** Joins the parts into one object; false where storage finds a part other than listed. */
  join(Key: string, UploadId: string, parts: readonly StoredPart[]): Promise<boolean> {
    return this.#ask("join the parts", async () => {
      try {
        await this.#inside.send(
          new CompleteMultipartUploadCommand({
            Bucket: this.#bucket,
            Key,
            UploadId,
            MultipartUpload: { Parts: parts.map((part) => ({ PartNumber: part.number, ETag: part.etag })) },
          }),
        );
        return true;
      } catch (error) {
        if (named(error, "InvalidPart", "InvalidPartOrder", "EntityTooSmall")) return false;
        throw error;
      }
    });
  }

  /** Drops an unfinished upload and its parts; fine where there is none. */
  abort(Key: string, UploadId: string): Promise<void> {
    return this.#ask("drop an upload", async () => {
      try {
        await this.#inside.send(new AbortMultipartUploadCommand({ Bucket: this.#bucket, Key, UploadId }));
      } catch (error) {
        if (!named(error, "NoSuchUpload", "404")) throw error;
      }
    });
  }

  /** Size of an object in bytes, or null where there is none. */
  size(Key: string): Promise<number | null> {
    return this.#ask("look for a file", async () => {
      try {
        const answer = await this.#inside.send(new HeadObjectCommand({ Bucket: this.#bucket, Key }));
        return answer.ContentLength ?? 0;
      } catch (error) {
        if (named(error, "NotFound", "NoSuchKey", "404")) return null;
        throw error;
      }
    });
  }

  /** The bytes of an object, as they come. */
  open(Key: string): Promise<AsyncIterable<Uint8Array>> {
    return this.#ask("read a file", async () => {
      const answer = await this.#inside.send(new GetObjectCommand({ Bucket: this.#bucket, Key }));
      if (!answer.Body) throw new Error("storage sent no body");
      // In Node the body is a stream of buffers; the type also allows what browsers get.
      return answer.Body as Readable;
    });
  }

  put(Key: string, Body: Uint8Array): Promise<void> {
    return this.#ask("store a file", async () => {
      await this.#inside.send(
        new PutObjectCommand({ Bucket: this.#bucket, Key, Body, ContentType: OPAQUE, ContentLength: Body.byteLength }),
      );
    });
  }

  /** A second object with the same bytes; false where there is no first. */
  copy(from: string, Key: string): Promise<boolean> {
    return this.#ask("copy a file", async () => {
      const CopySource = `${this.#bucket}/${from.split("/").map(encodeURIComponent).join("/")}`;
      try {
        await this.#inside.send(new CopyObjectCommand({ Bucket: this.#bucket, Key, CopySource }));
        return true;
      } catch (error) {
        if (named(error, "NoSuchKey", "404")) return false;
        throw error;
      }
    });
  }

  /** Removes objects; fine where they are gone already. */
  remove(keys: readonly string[]): Promise<void> {
    return this.#ask("remove a file", async () => {
      for (const Key of keys) await this.#inside.send(new DeleteObjectCommand({ Bucket: this.#bucket, Key }));
    });
  }
}

/** RFC 6266 with RFC 8187 for names beyond ASCII. */
function disposition(name: string): string {
  const plain = name.replace(/[^\x20-\x7e]|["\\]/g, "_");
  const coded = encodeURIComponent(name).replace(/['()*]/g, (sign) => `%${sign.charCodeAt(0).toString(16).toUpperCase()}`);
  return `attachment; filename="${plain}"; filename*=UTF-8''${coded}`;
}

let made: Store | undefined;

/** The storage of this process, connected on first use: a build needs none. */
export function store(): Store {
  made ??= new Store();
  return made;
}
