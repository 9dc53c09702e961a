import "server-only";
import type { Viewer } from "@/lib/server/access/viewer";
import { findCapture } from "@/lib/server/access/visible";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { store } from "./store";

/** Address of the edge archive in storage, good for ten minutes; for members and for whoever holds a link to the case. */
export async function archiveAddress(em: EntityManager, viewer: Viewer, id: string): Promise<string> {
  const row = await findCapture(em, viewer, id);
  if (!row.archiveKey) throw new Refusal("not-found", { detail: "no archive yet" });
  return store().signGet(row.archiveKey);
}

/** Address of the original file in storage, saved under the name it came with. The door has asked "capture.download". */
export async function rawAddress(em: EntityManager, viewer: Viewer, id: string): Promise<string> {
  const row = await findCapture(em, viewer, id);
  return store().signGet(row.key, row.name);
}
