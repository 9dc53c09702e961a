import "server-only";
import { Roster } from "@/entities/roster";
import type { RosterView } from "@/lib/case/catalogue";
import { type MemberViewer, within } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

export function rosterView(row: Roster): RosterView {
  return { id: row.id, name: row.name, version: row.version, entries: row.entries, updated_at: row.updatedAt.toISOString() };
}

export async function findRoster(em: EntityManager, viewer: MemberViewer, id: string): Promise<Roster> {
  const row = await em.findOne(Roster, { ...within(viewer), id });
  if (!row) throw new Refusal("not-found", { detail: `roster ${id}` });
  return row;
}

/** The team's rosters by name. */
export async function listRosters(em: EntityManager, viewer: MemberViewer): Promise<readonly RosterView[]> {
  return (await em.find(Roster, within(viewer), { orderBy: { name: "asc" } })).map(rosterView);
}
