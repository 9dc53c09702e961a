import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Case } from "./case";
import { User } from "./user";

/** A link that opens one case, read-only, without an account. */
export const Share = defineEntity({
  name: "Share",
  tableName: "shares",
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    case: () => p.manyToOne(Case).ref().deleteRule("cascade").index(),
    label: p.string().length(120).default(""),
    /** SHA-256 of the 256-bit secret in the link. The secret itself is nowhere. */
    secretHash: p.string().length(64).unique(),
    /** argon2id in PHC string form; null for none. */
    passphraseHash: p.string().length(255).nullable(),
    /** Query string of the exact view that was shared. */
    view: p.text().default(""),
    rawAllowed: p.boolean().default(false),
    expiresAt: p.datetime(),
    revokedAt: p.datetime().nullable(),
    createdBy: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
    opened: p.integer().default(0),
    lastOpenedAt: p.datetime().nullable(),
  },
});
export type Share = InferEntity<typeof Share>;
