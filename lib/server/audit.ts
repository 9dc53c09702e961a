import "server-only";
import { Audit } from "@/entities/audit";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import type { MemberViewer } from "./access/viewer";
import type { EntityManager } from "./database";

type Detail = Record<string, string | number | boolean | null>;

interface Entry {
  readonly team: Team;
  readonly actor: User | null;
  readonly actorName: string;
  readonly event: string;
  readonly subject: string;
  readonly detail: Detail;
}

/** Adds a line to the team's trail in the unit of work of the change itself: both are kept, or neither. */
export function record(em: EntityManager, entry: Entry): void {
  em.create(Audit, entry);
}

/** The same for what a member did. `event` is `noun.verb`; `subject` is the id of what it was done to. */
export function recordBy(em: EntityManager, viewer: MemberViewer, event: string, subject: string, detail: Detail = {}): void {
  record(em, {
    team: em.getReference(Team, viewer.team.id),
    actor: em.getReference(User, viewer.user.id),
    actorName: viewer.user.name,
    event,
    subject,
    detail,
  });
}

/** One line as the trail's page shows it. */
export interface AuditLine {
  readonly id: string;
  readonly at: Date;
  readonly actorName: string;
  readonly event: string;
  readonly subject: string;
  readonly detail: Detail;
}

/** The newest lines of the viewer's team. */
export async function readAudit(em: EntityManager, viewer: MemberViewer, limit: number): Promise<AuditLine[]> {
  const rows = await em.find(Audit, { team: viewer.team.id }, { orderBy: { at: "desc", id: "desc" }, limit });
  return rows.map(({ id, at, actorName, event, subject, detail }) => ({ id, at, actorName, event, subject, detail }));
}
