import "server-only";
import { Profile } from "@/entities/profile";
import type { ProfileView } from "@/lib/case/catalogue";
import { type MemberViewer, within } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

export function profileView(row: Profile): ProfileView {
  return {
    id: row.id,
    name: row.name,
    version: row.version,
    base: row.base,
    changes: row.changes,
    updated_at: row.updatedAt.toISOString(),
  };
}

export async function findProfile(em: EntityManager, viewer: MemberViewer, id: string): Promise<Profile> {
  const row = await em.findOne(Profile, { ...within(viewer), id, retired: false });
  if (!row) throw new Refusal("not-found", { detail: `profile ${id}` });
  return row;
}

/** The team's own limits profiles by name; the built-in ones are in lib/limits. */
export async function listProfiles(em: EntityManager, viewer: MemberViewer): Promise<readonly ProfileView[]> {
  return (await em.find(Profile, { ...within(viewer), retired: false }, { orderBy: { name: "asc" } })).map(profileView);
}
