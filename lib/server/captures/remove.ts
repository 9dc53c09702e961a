import "server-only";
import { Capture } from "@/entities/capture";
import { type MemberViewer, may } from "@/lib/server/access/viewer";
import { findCapture } from "@/lib/server/access/visible";
import { record } from "@/lib/server/cases/events";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { store } from "./store";

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
