import "server-only";
import { LockMode } from "@mikro-orm/core";
import { Capture } from "@/entities/capture";
import { Case } from "@/entities/case";
import { User } from "@/entities/user";
import type { Read } from "@/lib/case/case";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { record } from "@/lib/server/cases/events";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

/** A checked file in storage. */
export interface StoredFile {
  readonly name: string;
  readonly size: number;
  readonly sha256: string;
  readonly key: string;
  readonly read: Read;
}

/** Makes a stored file the next capture of a case, in the caller's transaction. */
export async function addCapture(em: EntityManager, viewer: MemberViewer, caseId: string, file: StoredFile): Promise<Capture> {
  // Locks the case, so that two captures that finish at once get different places in it.
  const inCase = await em.findOne(Case, { id: caseId }, { lockMode: LockMode.PESSIMISTIC_WRITE });
  if (!inCase) throw new Refusal("not-found", { detail: "the case was deleted meanwhile" });
  const [{ next }]: { next: number }[] = await em.execute(
    "select coalesce(max(ordinal), 0) + 1 as next from captures where case_id = ?",
    [inCase.id],
  );
  const capture = em.create(Capture, { case: inCase, ordinal: next, ...file, uploadedBy: em.getReference(User, viewer.user.id) });
  await em.flush();
  const { name, sha256, size } = file;
  await record(em, inCase.id, viewer, { kind: "capture.added", words: `added the capture ${name}`, after: { sha256, size } });
  return capture;
}
