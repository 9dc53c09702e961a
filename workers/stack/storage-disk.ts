// In: a folder. Out: buckets of objects and unfinished uploads on disk. One process owns the folder.
// Bytes are written first and the small description is renamed into place last, so a crash leaves the old object.

import { createHash, randomUUID } from "node:crypto";
import { mkdir, readdir, readFile, rename, rm, writeFile } from "node:fs/promises";
import path from "node:path";
import type { Checksum } from "./storage-checksum";
import { StorageError } from "./storage-error";

/** What the client says about an object besides its bytes. */
export interface Description {
  readonly contentType: string;
  /** Content-Disposition, Content-Encoding, Cache-Control and x-amz-meta-*, by header name. */
  readonly headers: Readonly<Record<string, string>>;
}

export interface StoredObject extends Description {
  readonly key: string;
  /** Name of the data file in the bucket's folder. */
  readonly file: string;
  readonly size: number;
  readonly etag: string;
  /** Milliseconds since 1970. */
  readonly modified: number;
  readonly checksum?: Checksum;
}

export interface StoredPart {
  readonly number: number;
  readonly file: string;
  readonly size: number;
  /** md5 in hex. */
  readonly etag: string;
  readonly modified: number;
  readonly checksum?: Checksum;
}

export interface Upload extends Description {
  readonly id: string;
  readonly key: string;
  readonly started: number;
  readonly parts: Map<number, StoredPart>;
}

export class Bucket {
  readonly objects = new Map<string, StoredObject>();
  readonly uploads = new Map<string, Upload>();
  private readonly folder: string;
  private readonly turns = new Map<string, Promise<unknown>>();

  constructor(folder: string) {
    this.folder = folder;
  }

  /** Reads the descriptions of an existing bucket, or makes the folders of a new one. */
  async load(): Promise<void> {
    for (const part of ["objects", "uploads", "incoming"]) await mkdir(path.join(this.folder, part), { recursive: true });
    // Bodies that were cut off by the end of an earlier process.
    for (const name of await readdir(path.join(this.folder, "incoming")))
      await rm(path.join(this.folder, "incoming", name), { force: true });
    for (const object of await readAll<StoredObject>(path.join(this.folder, "objects"))) this.objects.set(object.key, object);
    for (const id of await readdir(path.join(this.folder, "uploads"))) {
      const [upload] = await readAll<Omit<Upload, "parts">>(path.join(this.folder, "uploads", id), /^upload\.json$/);
      if (!upload) continue;
      const parts = await readAll<StoredPart>(path.join(this.folder, "uploads", id), /^part-\d+\.json$/);
      this.uploads.set(id, { ...upload, parts: new Map(parts.map((part) => [part.number, part])) });
    }
  }

  /** A name for a body that is just coming in; anything left there is removed at the next load. */
  incoming(): string {
    return path.join(this.folder, "incoming", randomUUID());
  }

  dataFile(object: StoredObject): string {
    return path.join(this.folder, "objects", object.file);
  }

  partFile(upload: Upload, part: StoredPart): string {
    return path.join(this.folder, "uploads", upload.id, part.file);
  }

  /** Runs one writer per key at a time, in the order they came. */
  async inTurn<T>(key: string, work: () => Promise<T>): Promise<T> {
    const before = this.turns.get(key) ?? Promise.resolve();
    const mine = before.then(work, work);
    const settled = mine.catch(() => undefined);
    this.turns.set(key, settled);
    try {
      return await mine;
    } finally {
      if (this.turns.get(key) === settled) this.turns.delete(key);
    }
  }

  async put(source: string, object: Omit<StoredObject, "file">): Promise<StoredObject> {
    const name = keyName(object.key);
    const stored: StoredObject = { ...object, file: `${name}.${randomUUID()}` };
    await rename(source, path.join(this.folder, "objects", stored.file));
    await note(path.join(this.folder, "objects", `${name}.json`), stored);
    const old = this.objects.get(object.key);
    this.objects.set(object.key, stored);
    // A reader that has the old file open keeps it until it is done.
    if (old) await rm(this.dataFile(old), { force: true });
    return stored;
  }

  async remove(key: string): Promise<void> {
    const object = this.objects.get(key);
    if (!object) return;
    this.objects.delete(key);
    await rm(path.join(this.folder, "objects", `${keyName(key)}.json`), { force: true });
    await rm(this.dataFile(object), { force: true });
  }

  async begin(key: string, description: Description): Promise<Upload> {
    const upload: Upload = { ...description, id: randomUUID().replaceAll("-", ""), key, started: Date.now(), parts: new Map() };
    await mkdir(path.join(this.folder, "uploads", upload.id));
    const { parts: _parts, ...plain } = upload;
    await note(path.join(this.folder, "uploads", upload.id, "upload.json"), plain);
    this.uploads.set(upload.id, upload);
    return upload;
  }

  async putPart(upload: Upload, source: string, part: Omit<StoredPart, "file">): Promise<void> {
    const folder = path.join(this.folder, "uploads", upload.id);
    const stored: StoredPart = { ...part, file: `${part.number}.${randomUUID()}` };
    await rename(source, path.join(folder, stored.file)).catch(() => {
      throw new StorageError("NoSuchUpload", "The upload was completed or aborted while this part was coming in.");
    });
    await note(path.join(folder, `part-${part.number}.json`), stored);
    const old = upload.parts.get(part.number);
    upload.parts.set(part.number, stored);
    if (old) await rm(path.join(folder, old.file), { force: true });
  }

  async forget(upload: Upload): Promise<void> {
    this.uploads.delete(upload.id);
    await rm(path.join(this.folder, "uploads", upload.id), { recursive: true, force: true });
  }
}

export class Disk {
  readonly buckets = new Map<string, Bucket>();
  private readonly folder: string;

  constructor(folder: string) {
    this.folder = folder;
  }

  async load(): Promise<void> {
    await mkdir(this.folder, { recursive: true });
    for (const entry of await readdir(this.folder, { withFileTypes: true })) {
      if (entry.isDirectory()) await this.create(entry.name);
    }
  }

  async create(name: string): Promise<void> {
    if (!/^[a-z0-9][a-z0-9-]{1,61}[a-z0-9]$/.test(name)) {
      throw new StorageError("InvalidArgument", "A bucket's name has 3 to 63 small letters, digits and hyphens.");
    }
    const bucket = new Bucket(path.join(this.folder, name));
    await bucket.load();
    this.buckets.set(name, bucket);
  }

  async remove(name: string): Promise<void> {
    this.buckets.delete(name);
    await rm(path.join(this.folder, name), { recursive: true, force: true });
  }
}

/** Keys may hold anything, file names may not. */
function keyName(key: string): string {
  return createHash("sha256").update(key).digest("hex");
}

async function note(file: string, content: object): Promise<void> {
  const draft = `${file}.${randomUUID()}.new`;
  await writeFile(draft, JSON.stringify(content));
  await rename(draft, file);
}

async function readAll<T>(folder: string, pattern = /\.json$/): Promise<T[]> {
  const names = (await readdir(folder)).filter((name) => pattern.test(name));
  return Promise.all(names.map(async (name) => JSON.parse(await readFile(path.join(folder, name), "utf8"))));
}
