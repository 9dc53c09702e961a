import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { LimitChanges } from "@/lib/case/case";
import { Team } from "./team";

/** A team's own limits profile: a built-in one with some values changed (`derive` of lib/limits/profile.ts). */
export const Profile = defineEntity({
  name: "Profile",
  tableName: "profiles",
  indexes: [
    {
      name: "profiles_name_unique",
      expression: "create unique index profiles_name_unique on profiles (team_id, name) where not retired",
    },
  ],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    name: p.string().length(120),
    /** Name of the built-in profile it was derived from. */
    base: p.string().length(120),
    changes: p.json<LimitChanges>(),
    version: p.integer().version(),
    /** A profile that cases may have been judged by is put away, never deleted. */
    retired: p.boolean().default(false),
    updatedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Profile = InferEntity<typeof Profile>;
