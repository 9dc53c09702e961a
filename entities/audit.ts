import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Team } from "./team";
import { User } from "./user";

/** One line of a team's audit trail. Rows are added and never changed. */
export const Audit = defineEntity({
  name: "Audit",
  tableName: "audits",
  indexes: [{ properties: ["team", "at"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    /** Null for a share link, a station, or a person who has since been deleted. */
    actor: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    /** The actor's name as it was then. */
    actorName: p.string().length(120),
    /** What was done, as `noun.verb`: `member.invited`, `share.revoked`. */
    event: p.string().length(60),
    /** Id of what it was done to. */
    subject: p.string().length(120),
    /** Particulars worth reading a year later; never a secret. */
    detail: p.json<Record<string, string | number | boolean | null>>(),
    at: p.datetime().onCreate(() => new Date()),
  },
});
export type Audit = InferEntity<typeof Audit>;
