import "server-only";
import type { z } from "zod";
import { Roster } from "@/entities/roster";
import { Team } from "@/entities/team";
import type { ReplaceRosterSchema, RosterView, SaveRosterSchema } from "@/lib/case/catalogue";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand } from "@/lib/server/access/visible";
import { recordBy } from "@/lib/server/audit";
import { type EntityManager, fork } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { save } from "@/lib/server/save";
import { findRoster, rosterView } from "./read";

function taken() {
  return { words: "There is already a roster of this name.", fields: { name: "is taken" } };
}

export async function addRoster(
  em: EntityManager,
  viewer: MemberViewer,
  input: z.output<typeof SaveRosterSchema>,
): Promise<RosterView> {
  demand(viewer, "roster.edit");
  const row = em.create(Roster, { team: em.getReference(Team, viewer.team.id), name: input.name, entries: input.entries });
  recordBy(em, viewer, "roster.added", row.id, { name: row.name });
  await save(em, { taken });
  return rosterView(row);
}

/** Replaces a roster as a whole, on the version that was read. */
export async function replaceRoster(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof ReplaceRosterSchema>,
): Promise<RosterView> {
  demand(viewer, "roster.edit");
  const row = await findRoster(em, viewer, id);
  if (row.version !== input.version) throw new Refusal("stale", { theirs: rosterView(row) });
  row.name = input.name;
  row.entries = input.entries;
  row.updatedAt = new Date();
  recordBy(em, viewer, "roster.edited", row.id, { name: row.name });
  // The flush names the version too, so that of two writers at once only one succeeds.
  await save(em, { taken, theirs: async () => rosterView(await findRoster(await fork(), viewer, id)) });
  return rosterView(row);
}

/** Cases that used it go on without a roster. */
export async function removeRoster(em: EntityManager, viewer: MemberViewer, id: string): Promise<void> {
  demand(viewer, "roster.edit");
  const row = await findRoster(em, viewer, id);
  em.remove(row);
  recordBy(em, viewer, "roster.removed", row.id, { name: row.name });
  await em.flush();
}
