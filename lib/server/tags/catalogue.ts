import "server-only";
import type { z } from "zod";
import { FaultTag } from "@/entities/fault-tag";
import { Team } from "@/entities/team";
import type { FaultTagFile } from "@/lib/case/case";
import { type CreateFaultTagSchema, defaultFaultTags, type EditFaultTagSchema } from "@/lib/case/catalogue";
import { type MemberViewer, within } from "@/lib/server/access/viewer";
import { demand } from "@/lib/server/access/visible";
import { recordBy } from "@/lib/server/audit";
import { faultTagFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { save } from "@/lib/server/save";

/** The team's fault tags in their order, retired ones too. A team that has none yet gets the default set. */
export async function readCatalogue(em: EntityManager, viewer: MemberViewer): Promise<readonly FaultTagFile[]> {
  const order = { orderBy: { position: "asc", name: "asc" } } as const;
  const rows = await em.find(FaultTag, within(viewer), order);
  if (rows.length > 0) return rows.map(faultTagFile);
  await fillCatalogue(em, viewer.team.id);
  return (await em.find(FaultTag, within(viewer), order)).map(faultTagFile);
}

/** Two first readers at once both fill; the second finds everything there. */
async function fillCatalogue(em: EntityManager, team: string): Promise<void> {
  const rows = defaultFaultTags.map((tag, position) => ({ id: crypto.randomUUID(), team, position, retired: false, ...tag }));
  await em.createQueryBuilder(FaultTag).insert(rows).onConflict(["team", "name"]).ignore().execute();
}

export async function addFaultTag(
  em: EntityManager,
  viewer: MemberViewer,
  input: z.output<typeof CreateFaultTagSchema>,
): Promise<FaultTagFile> {
  demand(viewer, "catalogue.edit");
  const position = (await readCatalogue(em, viewer)).length;
  const row = em.create(FaultTag, { team: em.getReference(Team, viewer.team.id), position, ...input });
  recordBy(em, viewer, "fault-tag.added", row.id, { name: input.name });
  await save(em, { taken });
  return faultTagFile(row);
}

/** Renames, gives another key, retires or brings back. A retired tag gives its key back. */
export async function editFaultTag(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof EditFaultTagSchema>,
): Promise<FaultTagFile> {
  demand(viewer, "catalogue.edit");
  const row = await em.findOne(FaultTag, { ...within(viewer), id });
  if (!row) throw new Refusal("not-found", { detail: `fault tag ${id}` });
  if (input.name !== undefined) row.name = input.name;
  if (input.description !== undefined) row.description = input.description;
  if (input.retired !== undefined) row.retired = input.retired;
  if (input.key !== undefined) row.key = input.key;
  if (row.retired) row.key = null;
  recordBy(em, viewer, "fault-tag.edited", row.id, { name: row.name, key: row.key ?? null, retired: row.retired });
  await save(em, { taken });
  return faultTagFile(row);
}

function taken(constraint: string): { words: string; fields: Record<string, string> } {
  return constraint.includes("_key_")
    ? { words: "Another fault tag has this key.", fields: { key: "is taken" } }
    : { words: "The catalogue already has a fault tag of this name.", fields: { name: "is taken" } };
}
