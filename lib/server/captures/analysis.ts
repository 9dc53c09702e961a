import "server-only";
import { randomUUID } from "node:crypto";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import type { CaptureFile } from "@/lib/case/case";
import { type SignedArchive, type StartArchiveSchema, type StoreAnalysisSchema, UPLOAD_LIMIT } from "@/lib/case/upload";
import { type MemberViewer, may } from "@/lib/server/access/viewer";
import { demand, findCapture } from "@/lib/server/access/visible";
import { record } from "@/lib/server/cases/events";
import { captureFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { checkArchive } from "./archive";
import { store } from "./store";

/** Storage keys of one capture lie in one folder, beside the original. */
function folderOf(key: string): string {
  return key.slice(0, key.lastIndexOf("/"));
}

/** An address to put the edge archive to. What is put there is checked before anybody is served it. */
export async function startArchive(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof StartArchiveSchema>,
): Promise<SignedArchive> {
  demand(viewer, "capture.upload");
  const row = await findCapture(em, viewer, id);
  if (input.size > UPLOAD_LIMIT.archive) {
    throw new Refusal("too-large", { words: "The archive of this capture is too large to be stored. Cut the recording." });
  }
  const key = `${folderOf(row.key)}/incoming-${randomUUID()}`;
  const expires = new Date(Date.now() + UPLOAD_LIMIT.signed * 1000);
  return { key, url: await store().signPut(key, input.size), expires_at: expires.toISOString() };
}

/** Checks an archive against what was announced and against its summary, and keeps both in place of any earlier ones. */
export async function storeAnalysis(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof StoreAnalysisSchema>,
): Promise<CaptureFile> {
  demand(viewer, "capture.upload");
  const row = await findCapture(em, viewer, id);
  const incoming = input.archive.key;
  if (
    !/^incoming-[0-9a-f-]{36}$/.test(incoming.slice(folderOf(row.key).length + 1)) ||
    !incoming.startsWith(`${folderOf(row.key)}/`)
  ) {
    throw new Refusal("input-invalid", { fields: { "archive.key": "is not an address given for this capture" } });
  }
  // The signed address still works for a while, so what is checked and kept is a copy that nobody can write to.
  const kept = `${folderOf(row.key)}/archive-${randomUUID()}`;
  if (!(await store().copy(incoming, kept))) {
    throw new Refusal("upload-mismatch", { words: "The archive has not arrived in storage. Send it again." });
  }
  try {
    await checkArchive(await store().open(kept), input);
  } catch (error) {
    await store().remove([kept]);
    throw error;
  }
  const earlier = row.archiveKey;
  const capture = await keep(em, viewer, row.id, kept, input);
  await store().remove([incoming, ...(earlier ? [earlier] : [])]);
  return capture;
}

async function keep(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  key: string,
  { archive, summary, read, timebase }: z.output<typeof StoreAnalysisSchema>,
): Promise<CaptureFile> {
  return em.transactional(async (tx) => {
    const row = await tx.findOneOrFail(Capture, { id }, { populate: ["uploadedBy"], refresh: true });
    row.archiveKey = key;
    row.archiveSize = archive.size;
    row.summary = summary;
    row.read = read;
    row.timebase = timebase;
    row.verdict = summary.verdict;
    row.transactions = summary.transactionCount;
    row.faults = summary.faults.length;
    row.contests = summary.contests.length;
    await tx.flush();
    await record(tx, row.case.id, viewer, {
      kind: "capture.analysed",
      words: `read ${row.name}: ${summary.transactionCount} transactions, verdict ${summary.verdict}`,
      after: { read, limits: summary.limits },
    });
    return captureFile(row, row.uploadedBy?.getEntity().name ?? "a former member");
  });
}

/** Removes a capture with its notes and tags; for who uploaded it, and for who may edit the case. */
export async function removeCapture(em: EntityManager, viewer: MemberViewer, id: string): Promise<void> {
  const row = await findCapture(em, viewer, id);
  if (!may(viewer, "case.edit") && !(may(viewer, "capture.upload") && row.uploadedBy?.id === viewer.user.id)) {
    throw new Refusal("forbidden", { detail: "remove a capture" });
  }
  await em.transactional(async (tx) => {
    await tx.nativeDelete(Capture, { id: row.id });
    await record(tx, row.case.id, viewer, {
      kind: "capture.removed",
      words: `removed the capture ${row.name}`,
      before: { name: row.name, sha256: row.sha256, size: row.size },
    });
  });
  await store().remove([row.key, ...(row.archiveKey ? [row.archiveKey] : [])]);
}
