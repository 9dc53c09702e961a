import "server-only";
import type { z } from "zod";
import { Profile } from "@/entities/profile";
import { ProfileVersion } from "@/entities/profile-version";
import { Team } from "@/entities/team";
import type { ProfileView, ReplaceProfileSchema, SaveProfileSchema } from "@/lib/case/catalogue";
import { PROFILE_FORMAT, profileFrom } from "@/lib/diagnosis/profile-file";
import { isProfileName } from "@/lib/limits/profile";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand } from "@/lib/server/access/visible";
import { recordBy } from "@/lib/server/audit";
import { type EntityManager, fork } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { save } from "@/lib/server/save";
import { findProfile, profileView } from "./read";

function taken() {
  return { words: "There is already a limits profile of this name.", fields: { name: "is taken" } };
}

/** A profile that the analysis could not read is refused here, with what is wrong in it. */
function checkProfile({ name, base, changes }: z.output<typeof SaveProfileSchema>): void {
  if (!isProfileName(base)) throw new Refusal("input-invalid", { fields: { base: "is not a built-in limits profile" } });
  const read = profileFrom({ format: PROFILE_FORMAT, name, version: 1, base, limits: changes }, null);
  if (!read.ok) throw new Refusal("input-invalid", { words: read.problem.message, fields: { changes: read.problem.message } });
}

export async function addProfile(
  em: EntityManager,
  viewer: MemberViewer,
  input: z.output<typeof SaveProfileSchema>,
): Promise<ProfileView> {
  demand(viewer, "profile.edit");
  checkProfile(input);
  return em.transactional(async (tx) => {
    const row = tx.create(Profile, { team: tx.getReference(Team, viewer.team.id), ...input });
    recordBy(tx, viewer, "profile.added", row.id, { name: row.name, base: row.base });
    await save(tx, { taken });
    await keepVersion(tx, row);
    return profileView(row);
  });
}

/** Cases name a profile with its version; what they were judged by stays readable. */
async function keepVersion(em: EntityManager, row: Profile): Promise<void> {
  em.create(ProfileVersion, { profile: row, version: row.version, name: row.name, base: row.base, changes: row.changes });
  await em.flush();
}

/** Changes a profile on the version that was read; the change is its next version. */
export async function replaceProfile(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof ReplaceProfileSchema>,
): Promise<ProfileView> {
  demand(viewer, "profile.edit");
  checkProfile(input);
  return em.transactional(async (tx) => {
    const row = await findProfile(tx, viewer, id);
    if (row.version !== input.version) throw new Refusal("stale", { theirs: profileView(row) });
    row.name = input.name;
    row.base = input.base;
    row.changes = input.changes;
    row.updatedAt = new Date();
    recordBy(tx, viewer, "profile.edited", row.id, { name: row.name });
    await save(tx, { taken, theirs: async () => profileView(await findProfile(await fork(), viewer, id)) });
    await keepVersion(tx, row);
    return profileView(row);
  });
}

/** Puts a profile away: no new case can take it, the ones judged by it keep it. */
export async function retireProfile(em: EntityManager, viewer: MemberViewer, id: string): Promise<void> {
  demand(viewer, "profile.edit");
  const row = await findProfile(em, viewer, id);
  row.retired = true;
  recordBy(em, viewer, "profile.retired", row.id, { name: row.name });
  await em.flush();
}
