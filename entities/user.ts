import { defineEntity, type InferEntity, p } from "@mikro-orm/core";

/** A person with a password. What the person may do stands in the memberships, never here. */
export const User = defineEntity({
  name: "User",
  tableName: "users",
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    /** Trimmed and lower-cased before it gets here, so that the unique key ignores case. */
    email: p.string().length(254).unique(),
    name: p.string().length(120),
    /** argon2id in PHC string form. */
    passwordHash: p.string().length(255).hidden(),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type User = InferEntity<typeof User>;
