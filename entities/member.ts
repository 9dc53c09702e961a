import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { roles } from "@/lib/case/roles";
import { Team } from "./team";
import { User } from "./user";

/** One person in one team, with the role held there. */
export const Member = defineEntity({
  name: "Member",
  tableName: "members",
  uniques: [{ properties: ["team", "user"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    user: () => p.manyToOne(User).ref().deleteRule("cascade").index(),
    role: p.enum([...roles]),
    joinedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Member = InferEntity<typeof Member>;
