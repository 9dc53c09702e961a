import "server-only";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import { Upload } from "@/entities/upload";
import type { CaptureFile } from "@/lib/case/case";
import type { CompleteUploadSchema } from "@/lib/case/upload";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { captureFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { addCapture } from "./add";
import { type Checked, check } from "./check";
import { typeOf } from "./sniff";
import { store } from "./store";
import { findUpload, lengthOf, mustBeOpen } from "./upload";

/** Minutes after which a check is taken for dead and may be begun again: the process that ran it is gone. */
const CHECK_MINUTES = 30;

/**
 * Checks everything that was announced against what storage holds, and only then makes the capture. Asking again after a
 * lost answer gives the same capture.
 */
export async function completeUpload(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof CompleteUploadSchema>,
): Promise<CaptureFile> {
  const row = await findUpload(em, viewer, id);
  if (row.state === "complete" && row.capture) {
    const capture = await em.findOneOrFail(Capture, { id: row.capture.id });
    return captureFile(capture, viewer.user.name);
  }
  await claim(em, row);
  try {
    await joinParts(row, input.parts);
    const found = await check(await store().open(row.key), row.partSize);
    refuseDifferent(row, found);
    return await accept(em, viewer, row, found.sha256, input);
  } catch (error) {
    await release(em, row, error);
    throw error;
  }
}

/** One check at a time, on whichever copy of the application; a check that died is taken over. */
async function claim(em: EntityManager, row: Upload): Promise<void> {
  const dead = new Date(Date.now() - CHECK_MINUTES * 60_000);
  const claimed = await em.nativeUpdate(
    Upload,
    { id: row.id, $or: [{ state: "open" }, { state: "checking", touchedAt: { $lt: dead } }] },
    { state: "checking", touchedAt: new Date() },
  );
  if (claimed === 0) mustBeOpen(await em.findOneOrFail(Upload, { id: row.id }, { refresh: true }));
}

async function joinParts(row: Upload, told: readonly { number: number; etag: string }[]): Promise<void> {
  const stored = await store().parts(row.key, row.storageId);
  if (stored === null) {
    // Joined already by a check that died before it was done; anything else is gone for good.
    if ((await store().size(row.key)) === row.size) return;
    throw new Refusal("upload-ended", { detail: "storage does not know it" });
  }
  const missing = Array.from({ length: row.parts }, (_, at) => at + 1).filter((number) => {
    const part = stored.find((other) => other.number === number);
    const said = told.find((other) => other.number === number);
    return (
      !part ||
      !said ||
      bare(said.etag) !== bare(part.etag) ||
      part.size !== lengthOf(row, number) ||
      !row.checksums[String(number)]
    );
  });
  if (missing.length > 0 || told.length !== row.parts) {
    const some = missing.slice(0, 10).join(", ");
    throw new Refusal("conflict", {
      detail: `parts ${some}`,
      words:
        missing.length > 0
          ? `These parts are missing or differ from what was sent: ${some}${missing.length > 10 ? " and more" : ""}. Send them again, then finish.`
          : `The file has ${row.parts} parts; ${told.length} were named.`,
    });
  }
  const ordered = stored.filter((part) => part.number >= 1 && part.number <= row.parts).sort((a, b) => a.number - b.number);
  if (!(await store().join(row.key, row.storageId, ordered))) {
    throw new Refusal("conflict", {
      words: "A part changed while the upload was being finished. Ask which parts are there and finish again.",
    });
  }
}

function bare(etag: string): string {
  return etag.replace(/^"|"$/g, "");
}

function refuseDifferent(row: Upload, found: Checked): void {
  if (found.size !== row.size) {
    throw new Refusal("upload-mismatch", {
      words: `Storage holds ${found.size} bytes; ${row.size} were announced. Upload the file again.`,
    });
  }
  const wrong = found.slices.findIndex((sum, at) => sum !== row.checksums[String(at + 1)]);
  if (wrong !== -1) {
    throw new Refusal("upload-mismatch", {
      words: `Part ${wrong + 1} does not have the checksum that was announced, so the file was not accepted. Upload it again.`,
    });
  }
  const type = typeOf(found.head, row.name);
  if (!type.ok) throw new Refusal("type-refused", { words: `Not accepted: ${type.problem.message} ${type.problem.advice}` });
}

async function accept(
  em: EntityManager,
  viewer: MemberViewer,
  upload: Upload,
  sha256: string,
  input: z.output<typeof CompleteUploadSchema>,
): Promise<CaptureFile> {
  return em.transactional(async (tx) => {
    const { name, size, key } = upload;
    const capture = await addCapture(tx, viewer, upload.case.id, { name, size, sha256, key, read: input.read });
    await tx.nativeUpdate(Upload, { id: upload.id }, { state: "complete", capture: capture.id, touchedAt: new Date() });
    return captureFile(capture, viewer.user.name);
  });
}

/**
 * After a failed check: what can be mended by sending parts again, or by asking again, leaves the upload open; a file that
 * is not what was announced is removed.
 */
async function release(em: EntityManager, row: Upload, error: unknown): Promise<void> {
  const final = error instanceof Refusal && ["upload-mismatch", "type-refused", "upload-ended", "not-found"].includes(error.code);
  await em.nativeUpdate(Upload, { id: row.id, state: "checking" }, { state: final ? "refused" : "open", touchedAt: new Date() });
  if (final) await store().remove([row.key]);
}
