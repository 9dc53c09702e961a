import "server-only";
import { ProfileVersion } from "@/entities/profile-version";
import { Roster } from "@/entities/roster";
import type { Settings } from "@/lib/case/case";
import { type MemberViewer, within } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

/** Settings may only name what the team has. */
export async function checkSettings(em: EntityManager, viewer: MemberViewer, settings: Settings): Promise<void> {
  const { limits, roster } = settings;
  if (roster !== null && !(await em.findOne(Roster, { ...within(viewer), id: roster }))) {
    throw new Refusal("input-invalid", { fields: { "settings.roster": "is not a roster of this team" } });
  }
  if (limits.kind !== "team") return;
  const found = await em.findOne(ProfileVersion, {
    profile: { ...within(viewer), id: limits.profile },
    version: limits.version,
  });
  if (!found) throw new Refusal("input-invalid", { fields: { "settings.limits": "is not a limits profile of this team" } });
}
