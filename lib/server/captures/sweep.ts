import "server-only";
import { Upload } from "@/entities/upload";
import { UPLOAD_LIMIT } from "@/lib/case/upload";
import { type EntityManager, fork } from "@/lib/server/database";
import { store } from "./store";

const DAYS_KEPT = 30;
const MINUTES_BETWEEN = 30;
let sweptAt = 0;

/** Sweeps in the background when the last time is half an hour past; called wherever an upload begins. */
export function sweepSometimes(): void {
  const now = Date.now();
  if (now - sweptAt < MINUTES_BETWEEN * 60_000) return;
  sweptAt = now;
  fork()
    .then((em) => sweepUploads(em))
    .catch((error: unknown) => console.error("sweeping uploads failed", error));
}

/**
 * Drops uploads that nobody touched for two days, with their parts, and forgets ended ones after a month. Safe on several
 * copies of the application at once: each row is taken by one of them. Returns how many were dropped.
 */
export async function sweepUploads(em: EntityManager, now: Date = new Date()): Promise<number> {
  const before = new Date(now.getTime() - UPLOAD_LIMIT.stale * 3_600_000);
  const stale = await em.find(Upload, { state: { $in: ["open", "checking"] }, touchedAt: { $lt: before } }, { limit: 100 });
  let dropped = 0;
  for (const upload of stale) {
    const taken = await em.nativeUpdate(
      Upload,
      { id: upload.id, state: upload.state, touchedAt: { $lt: before } },
      { state: "cancelled" },
    );
    if (taken === 0) continue;
    await store().abort(upload.key, upload.storageId);
    await store().remove([upload.key]);
    dropped += 1;
  }
  const forgotten = new Date(now.getTime() - DAYS_KEPT * 86_400_000);
  await em.nativeDelete(Upload, { state: { $in: ["complete", "refused", "cancelled"] }, touchedAt: { $lt: forgotten } });
  return dropped;
}
