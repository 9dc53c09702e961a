import "server-only";
import type { Case } from "@/entities/case";
import { Event } from "@/entities/event";
import { Member } from "@/entities/member";
import type { User } from "@/entities/user";
import { actions } from "@/lib/case/roles";
import type { CaseView, Event as EventView } from "@/lib/case/wire";
import { type MemberViewer, may, within } from "@/lib/server/access/viewer";
import { findCase } from "@/lib/server/access/visible";
import type { EntityManager } from "@/lib/server/database";
import { caseFile } from "./file";

export { listCases } from "./list";

/** A case with everything below it, or a refusal "not-found". */
export async function readCase(em: EntityManager, viewer: MemberViewer, number: number): Promise<CaseView> {
  return caseView(em, viewer, await findCase(em, viewer, number));
}

/** The answer of a read, for a row that is at hand. */
export async function caseView(em: EntityManager, viewer: MemberViewer, row: Case): Promise<CaseView> {
  const { assignee, ...file } = await caseFile(em, row);
  return {
    ...file,
    id: row.id,
    version: row.version,
    assignee: row.assignee && assignee !== null ? { id: row.assignee.id, name: assignee } : null,
    may: actions.filter((action) => may(viewer, action)),
  };
}

const EVENTS = 500;

/** The newest 500 lines of a case's trail, newest first. */
export async function readEvents(em: EntityManager, viewer: MemberViewer, number: number): Promise<readonly EventView[]> {
  const row = await findCase(em, viewer, number);
  const events = await em.find(
    Event,
    { case: row.id },
    { orderBy: { at: "desc", id: "desc" }, limit: EVENTS, populate: ["actor"] },
  );
  return events.map((event) => ({
    id: event.id,
    kind: event.kind,
    actor: event.actor ? { id: event.actor.id, name: event.actor.getEntity().name } : null,
    words: event.words,
    before: event.before ?? null,
    after: event.after ?? null,
    at: event.at.toISOString(),
  }));
}

/** Members a case can be assigned to, by name. */
export async function readPeople(
  em: EntityManager,
  viewer: MemberViewer,
): Promise<readonly { id: string; name: string; role: string }[]> {
  const members = await em.find(Member, within(viewer), { populate: ["user"] });
  return members
    .map((member) => ({ id: member.user.id, name: member.user.getEntity().name, role: member.role }))
    .sort((a, b) => a.name.localeCompare(b.name, "en"));
}

/** A member of the viewer's team, or null: people of other teams cannot be named. */
export async function colleague(em: EntityManager, viewer: MemberViewer, id: string): Promise<User | null> {
  const member = await em.findOne(Member, { ...within(viewer), user: id }, { populate: ["user"] });
  return member?.user.getEntity() ?? null;
}
