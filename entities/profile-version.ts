import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
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
    content: p.json<Record<string, unknown>>(),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type ProfileVersion = InferEntity<typeof ProfileVersion>;
