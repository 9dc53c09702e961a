import "server-only";
import { Case } from "@/entities/case";
import { Event } from "@/entities/event";
import { User } from "@/entities/user";
import type { eventKinds } from "@/lib/case/wire";
import type { MemberViewer } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";

interface Happening {
  readonly kind: (typeof eventKinds)[number];
  /** One sentence without the actor: "wrote note 3". */
  readonly words: string;
  readonly before?: Record<string, unknown>;
  readonly after?: Record<string, unknown>;
  readonly caseVersion?: number;
}

/** Adds one line to a case's trail and moves the case to the top of the list. Part of the caller's transaction. */
export async function record(em: EntityManager, caseId: string, viewer: MemberViewer, what: Happening): Promise<void> {
  em.create(Event, {
    case: em.getReference(Case, caseId, { wrapped: true }),
    actor: em.getReference(User, viewer.user.id, { wrapped: true }),
    kind: what.kind,
    words: what.words.slice(0, 400),
    before: what.before ?? null,
    after: what.after ?? null,
    caseVersion: what.caseVersion ?? null,
  });
  await em.flush();
  // Not through the entity: that would raise the version, and a note is not an edit of the case.
  await em.execute("update cases set updated_at = now() where id = ?", [caseId]);
}
