import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { roles } from "@/lib/case/roles";
import { Team } from "./team";
import { User } from "./user";

/** A place in a team offered by mail. Open while neither accepted nor revoked nor past its date. */
export const Invitation = defineEntity({
  name: "Invitation",
  tableName: "invitations",
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade").index(),
    email: p.string().length(254),
    role: p.enum([...roles]),
    /** SHA-256 of the token in the mailed link. */
    tokenHash: p.string().length(64).unique(),
    invitedBy: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
    expiresAt: p.datetime(),
    acceptedAt: p.datetime().nullable(),
    revokedAt: p.datetime().nullable(),
  },
});
export type Invitation = InferEntity<typeof Invitation>;
