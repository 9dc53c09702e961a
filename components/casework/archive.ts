// After a capture was decoded from the local file and has arrived in storage: its edges packed, sent beside it, and checked by
// the server, so that the case and its links open without reading the original again.

import { type Remote, wrap } from "comlink";
import type { CaptureFile } from "@/lib/case/case";
import { CaptureAnswerSchema, SignedArchiveSchema } from "@/lib/case/upload";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import type { ArchiveApi, Source } from "@/workers/protocol";
import { ask } from "./api";

async function packed(source: Source, read: ReadChoices): Promise<Uint8Array<ArrayBuffer>> {
  const worker = new Worker(new URL("../../workers/archive.worker.ts", import.meta.url), { type: "module", name: "archive" });
  try {
    const api: Remote<ArchiveApi> = wrap(worker);
    const died = new Promise<never>((_, reject) => {
      worker.onerror = (event) => reject(new Error(event.message || "The archive worker could not be started."));
    });
    const made = await Promise.race([api.archive(source, read), died]);
    if (!made.ok) throw new Error(made.problem.message);
    return made.value;
  } finally {
    worker.terminate();
  }
}

async function sha256(bytes: Uint8Array<ArrayBuffer>): Promise<string> {
  const digest = await crypto.subtle.digest("SHA-256", bytes);
  return [...new Uint8Array(digest)].map((byte) => byte.toString(16).padStart(2, "0")).join("");
}

/** Packs, sends and has checked; answers the capture as it then stands. */
export async function storeAnalysis(
  capture: string,
  source: Source,
  read: ReadChoices,
  log: string | null,
): Promise<CaptureFile> {
  const bytes = await packed(source, read);
  const seal = { size: bytes.byteLength, sha256: await sha256(bytes) };
  const signed = await ask({ method: "POST", path: `/api/captures/${capture}/archive`, body: seal, answer: SignedArchiveSchema });
  const put = await fetch(signed.url, { method: "PUT", body: bytes });
  if (!put.ok) throw new Error(`The storage answered ${put.status} to the edge archive.`);
  const body = { archive: { key: signed.key, ...seal }, read, log };
  const answer = await ask({ method: "PUT", path: `/api/captures/${capture}/analysis`, body, answer: CaptureAnswerSchema });
  return answer.capture;
}

/** Has the server read the original itself, under these choices. */
export async function readOnServer(capture: string, read: ReadChoices, log: string | null): Promise<CaptureFile> {
  const answer = await ask({
    method: "PUT",
    path: `/api/captures/${capture}/reading`,
    body: { read, log },
    answer: CaptureAnswerSchema,
  });
  return answer.capture;
}
