import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { RosterRow } from "@/lib/case/case";
import { Team } from "./team";

/** The devices on one kind of bus, kept by a team for all its cases. */
export const Roster = defineEntity({
  name: "Roster",
  tableName: "rosters",
  uniques: [{ properties: ["team", "name"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    name: p.string().length(120),
    entries: p.json<RosterRow[]>(),
    version: p.integer().version(),
    updatedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Roster = InferEntity<typeof Roster>;
