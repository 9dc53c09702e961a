import { createHash } from "node:crypto";
import type { Upload } from "@/lib/case/upload";
import { send } from "./storage";
import { ask, type Colleague } from "./team";

export function sha256(bytes: Uint8Array): string {
  return createHash("sha256").update(bytes).digest("hex");
}

/** Puts bytes as a browser does: to the address, with nothing but their length. */
export async function put(url: string, bytes: Uint8Array): Promise<{ status: number; etag: string }> {
  const answer = await send("PUT", url, {}, Buffer.from(bytes));
  return { status: answer.status, etag: String(answer.headers.etag ?? "") };
}

/** The upload protocol as the page speaks it, one step at a time. After `openTestDatabase`. */
export async function uploader(person: Colleague) {
  const uploads = await import("@/app/api/uploads/route");
  const upload = await import("@/app/api/uploads/[id]/route");
  const parts = await import("@/app/api/uploads/[id]/parts/route");
  const complete = await import("@/app/api/uploads/[id]/complete/route");
  const { browser } = person;
  const slice = (file: Uint8Array, of: Pick<Upload, "part_size">, number: number) =>
    file.subarray((number - 1) * of.part_size, number * of.part_size);
  return {
    start: (number: number, name: string, size: number) =>
      ask(browser, uploads.POST, "POST", { body: { case: number, name, size } }),
    list: () => ask(browser, uploads.GET, "GET"),
    read: (id: string) => ask(browser, upload.GET, "GET", { params: { id } }),
    cancel: (id: string) => ask(browser, upload.DELETE, "DELETE", { params: { id } }),
    sign: (id: string, wanted: readonly { number: number; sha256: string }[]) =>
      ask(browser, parts.POST, "POST", { params: { id }, body: { parts: wanted } }),
    complete: (id: string, sent: readonly { number: number; etag: string }[], read: object = {}) =>
      ask(browser, complete.POST, "POST", { params: { id }, body: { parts: sent, read } }),
    slice,
    /** Signs and sends some parts of a file. */
    async send(of: Upload, file: Uint8Array, numbers: readonly number[]) {
      const wanted = numbers.map((number) => ({ number, sha256: sha256(slice(file, of, number)) }));
      const signed = await ask(browser, parts.POST, "POST", { params: { id: of.id }, body: { parts: wanted } });
      const sent: { number: number; etag: string }[] = [];
      for (const { number, url } of signed.body.parts) {
        const { status, etag } = await put(url, slice(file, of, number));
        if (status !== 200) throw new Error(`part ${number}: ${status}`);
        sent.push({ number, etag });
      }
      return sent;
    },
    /** The whole way; returns the answer of the last step. */
    async whole(number: number, name: string, file: Uint8Array) {
      const { body } = await ask(browser, uploads.POST, "POST", { body: { case: number, name, size: file.length } });
      const of: Upload = body.upload;
      const sent = await this.send(
        of,
        file,
        Array.from({ length: of.parts }, (_, at) => at + 1),
      );
      return this.complete(of.id, sent);
    },
  };
}

/** A CSV of two channels, `bytes` long: a real table, though the same piece of recording over and over. */
export function table(bytes: number, seed = 1): Uint8Array {
  const rows: string[] = [];
  let state = seed;
  for (let at = 0; at < 2000; at += 1) {
    state = (state * 1_103_515_245 + 12_345) % 2_147_483_648;
    rows.push(`${(at * 1e-7).toFixed(7)},${state & 1},${(state >> 3) & 1}\n`);
  }
  const piece = rows.join("");
  return Buffer.from(`time,SCL,SDA\n${piece.repeat(Math.ceil(bytes / piece.length))}`).subarray(0, Math.max(bytes, 14));
}

/** Makes the storage fake misbehave as planned; `calm` ends that. */
export async function plan(fault: object | "calm"): Promise<void> {
  const answer = await fetch(`${process.env.S3_ENDPOINT}/-/${fault === "calm" ? "calm" : "faults"}`, {
    method: "POST",
    headers: { authorization: `Bearer ${process.env.S3_SECRET_KEY}`, "content-type": "application/json" },
    body: fault === "calm" ? undefined : JSON.stringify(fault),
  });
  if (!answer.ok) throw new Error(`the storage fake refused the plan: ${answer.status}`);
}
