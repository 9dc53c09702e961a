import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Team } from "./team";
import { User } from "./user";

/** A signed-in browser. The cookie holds the secret; this row holds its SHA-256 and nothing that could rebuild it. */
export const Session = defineEntity({
  name: "Session",
  tableName: "sessions",
  properties: {
    /** SHA-256 of the session id, 64 hexadecimal digits. */
    id: p.string().length(64).primary(),
    user: () => p.manyToOne(User).ref().deleteRule("cascade").index(),
    /** The team being worked in; null when the person belongs to none, or was removed from it. */
    team: () => p.manyToOne(Team).ref().nullable().deleteRule("set null"),
    /** What the browser called itself at sign-in, for the list of other sessions. */
    agent: p.string().length(300),
    createdAt: p.datetime().onCreate(() => new Date()),
    expiresAt: p.datetime().index(),
  },
});
export type Session = InferEntity<typeof Session>;
