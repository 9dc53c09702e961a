// One file on its way to storage: in parts, straight there with signed requests, able to pause, to outlive a lost
// connection, and to go on after a reload when the same file is picked again. No React here; a page subscribes.

import { type CaptureAnswer, CaptureAnswerSchema, SignedPartsSchema, type Upload, UploadAnswerSchema } from "@/lib/case/upload";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { ApiProblem, ask, wordsOf } from "../casework/api";

export type TransferState = "waiting" | "sending" | "paused" | "offline" | "checking" | "done" | "failed" | "cancelled";

export interface TransferView {
  readonly state: TransferState;
  readonly name: string;
  readonly size: number;
  /** Bytes that storage has confirmed, plus those of parts under way. */
  readonly sent: number;
  /** Sentence for "failed" and "offline". */
  readonly message: string;
  readonly capture: CaptureAnswer["capture"] | null;
}

let count = 0;
const PARALLEL = 2;
/** How long a part on its way is waited for after another broke off. */
const GRACE_MS = 5000;
/** Seconds between tries while the connection is gone; the browser's "online" event cuts the wait short. */
const WAITS_S = [1, 2, 4, 8, 15];

export class Transfer {
  private listeners = new Set<() => void>();
  private upload: Upload | null = null;
  private readonly etags = new Map<number, string>();
  private readonly underWay = new Map<number, { request: XMLHttpRequest | null; sent: number }>();
  private running = false;
  /** Tells transfers of this page apart. */
  readonly key = `transfer-${++count}`;
  /** How the person has the file read by now; kept with the capture. */
  private choices: ReadChoices = {};
  private now: TransferView;

  constructor(
    readonly file: File,
    readonly caseNumber: number,
    /** An unfinished upload of this very file to go on with. */
    private readonly resumed: string | null,
  ) {
    this.now = { state: "waiting", name: file.name, size: file.size, sent: 0, message: "", capture: null };
  }

  readonly subscribe = (listener: () => void): (() => void) => {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  };

  readonly view = (): TransferView => this.now;

  /** Id of the upload on the server, once it has begun. */
  get uploadId(): string | null {
    return this.upload?.id ?? this.resumed;
  }

  get read(): ReadChoices {
    return this.choices;
  }

  choose(read: ReadChoices): void {
    this.choices = read;
    this.tell({});
  }

  start(): void {
    if (this.running || this.now.state === "done" || this.now.state === "cancelled") return;
    this.running = true;
    this.tell({ state: "sending", message: "" });
    void this.run();
  }

  pause(): void {
    if (this.now.state !== "sending" && this.now.state !== "offline") return;
    this.running = false;
    this.abortParts();
    this.tell({ state: "paused" });
  }

  async cancel(): Promise<void> {
    this.running = false;
    this.abortParts();
    this.tell({ state: "cancelled" });
    const id = this.uploadId;
    if (id !== null) await ask({ method: "DELETE", path: `/api/uploads/${id}` }).catch(() => undefined);
  }

  private tell(change: Partial<TransferView>): void {
    const part = this.upload?.part_size ?? 0;
    let sent = [...this.etags.keys()].reduce((sum, n) => sum + this.sizeOf(n, part), 0);
    for (const { sent: bytes } of this.underWay.values()) sent += bytes;
    this.now = { ...this.now, sent: Math.min(sent, this.file.size), ...change };
    for (const listener of this.listeners) listener();
  }

  private sizeOf(number: number, part: number): number {
    return Math.min(part, this.file.size - (number - 1) * part);
  }

  private abortParts(): void {
    for (const { request } of this.underWay.values()) request?.abort();
    this.underWay.clear();
  }

  // Tries until done, paused, or refused for a reason that waiting does not mend.
  private async run(): Promise<void> {
    for (let attempt = 0; this.running; attempt++) {
      try {
        await this.begin();
        await this.sendParts(() => {
          attempt = 0;
        });
        if (!this.running) return;
        await this.complete();
        return;
      } catch (error) {
        if (!this.running) return;
        this.abortParts();
        if (!passes(error)) {
          this.running = false;
          this.tell({ state: "failed", message: wordsOf(error) });
          return;
        }
        this.tell({ state: "offline", message: "The connection is gone. What has arrived is kept; this goes on by itself." });
        await online(WAITS_S[Math.min(attempt, WAITS_S.length - 1)]);
        if (this.running) this.tell({ state: "sending", message: "" });
      }
    }
  }

  private async begin(): Promise<void> {
    const id = this.uploadId;
    const { upload } =
      id === null
        ? await ask({
            method: "POST",
            path: "/api/uploads",
            body: { case: this.caseNumber, name: this.file.name, size: this.file.size },
            answer: UploadAnswerSchema,
          })
        : await ask({ path: `/api/uploads/${id}`, answer: UploadAnswerSchema });
    this.upload = upload;
    // A part counts as there only where it is this file's part.
    for (const part of upload.received) {
      if (this.etags.has(part.number)) continue;
      if ((await this.hash(part.number)) === part.sha256) this.etags.set(part.number, part.etag);
    }
    this.tell({});
  }

  private slice(number: number): Blob {
    const part = this.upload?.part_size ?? 0;
    return this.file.slice((number - 1) * part, (number - 1) * part + this.sizeOf(number, part));
  }

  private async hash(number: number): Promise<string> {
    const digest = await crypto.subtle.digest("SHA-256", await this.slice(number).arrayBuffer());
    return [...new Uint8Array(digest)].map((byte) => byte.toString(16).padStart(2, "0")).join("");
  }

  private async sendParts(arrived: () => void): Promise<void> {
    const { parts = 0 } = this.upload ?? {};
    const missing = Array.from({ length: parts }, (_, i) => i + 1).filter((n) => !this.etags.has(n));
    let broken = false;
    const lane = async () => {
      for (let number = missing.shift(); number !== undefined && this.running && !broken; number = missing.shift()) {
        try {
          await this.sendPart(number);
        } catch (error) {
          broken = true;
          throw error;
        }
        arrived();
      }
    };
    const lanes = Array.from({ length: PARALLEL }, lane);
    try {
      await Promise.all(lanes);
    } catch (error) {
      // What is on its way beside the part that broke off may still arrive, and need not be sent again.
      await Promise.race([Promise.allSettled(lanes), new Promise((done) => setTimeout(done, GRACE_MS))]);
      throw error;
    }
  }

  private async sendPart(number: number): Promise<void> {
    const sha256 = await this.hash(number);
    const signed = await ask({
      method: "POST",
      path: `/api/uploads/${this.uploadId}/parts`,
      body: { parts: [{ number, sha256 }] },
      answer: SignedPartsSchema,
    });
    if (!this.running) return;
    this.underWay.set(number, { request: null, sent: 0 });
    const etag = await this.put(number, signed.parts[0].url);
    this.underWay.delete(number);
    this.etags.set(number, etag);
    this.tell({});
  }

  // XMLHttpRequest, because fetch tells nothing of how far an upload has come.
  private put(number: number, url: string): Promise<string> {
    return new Promise((done, fail) => {
      const request = new XMLHttpRequest();
      const entry = { request, sent: 0 };
      this.underWay.set(number, entry);
      request.open("PUT", url);
      request.upload.onprogress = (event) => {
        entry.sent = event.loaded;
        if (this.running) this.tell({});
      };
      request.onload = () => {
        const etag = request.getResponseHeader("etag");
        if (request.status === 200 && etag !== null) done(etag);
        else fail(new StorageAnswer(request.status));
      };
      request.onerror = () => fail(new StorageAnswer(0));
      request.onabort = () => fail(new StorageAnswer(0));
      request.send(this.slice(number));
    });
  }

  private async complete(): Promise<void> {
    this.tell({ state: "checking" });
    const parts = [...this.etags].sort(([a], [b]) => a - b).map(([number, etag]) => ({ number, etag }));
    const { capture } = await ask({
      method: "POST",
      path: `/api/uploads/${this.uploadId}/complete`,
      body: { parts, read: this.choices },
      answer: CaptureAnswerSchema,
    });
    this.running = false;
    this.tell({ state: "done", capture, sent: this.file.size });
  }
}

/** Storage answered something else than 200, or nothing (0). */
class StorageAnswer extends Error {
  constructor(readonly status: number) {
    super(status === 0 ? "The storage did not answer." : `The storage answered ${status}.`);
  }
}

// Whether trying again may help: no answer, or trouble on the other side. A signed address that ran out (403) is signed anew.
function passes(error: unknown): boolean {
  if (error instanceof StorageAnswer) return error.status === 0 || error.status === 403 || error.status >= 500;
  if (error instanceof ApiProblem)
    return error.code === "offline" || error.status >= 500 || error.code === "upload-busy" || error.code === "too-many";
  return false;
}

function online(waitSeconds: number): Promise<void> {
  return new Promise((done) => {
    const finish = () => {
      clearTimeout(timer);
      removeEventListener("online", finish);
      done();
    };
    const timer = setTimeout(finish, waitSeconds * 1000);
    addEventListener("online", finish);
  });
}
