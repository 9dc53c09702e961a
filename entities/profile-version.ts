import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { LimitChanges } from "@/lib/case/case";
import { Profile } from "./profile";

/** A limits profile as it was at one version, for the cases that were judged by it. Written once, never changed. */
export const ProfileVersion = defineEntity({
  name: "ProfileVersion",
  tableName: "profile_versions",
  uniques: [{ properties: ["profile", "version"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    profile: () => p.manyToOne(Profile).ref().deleteRule("cascade"),
    version: p.integer(),
    name: p.string().length(120),
    base: p.string().length(120),
    changes: p.json<LimitChanges>(),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type ProfileVersion = InferEntity<typeof ProfileVersion>;
