import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Team } from "./team";

/** One category of the team's catalogue. */
export const FaultTag = defineEntity({
  name: "FaultTag",
  tableName: "fault_tags",
  uniques: [{ properties: ["team", "name"] }, { properties: ["team", "key"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    name: p.string().length(120),
    /** The one key that puts it on the selected transaction; null for none. A retired tag gives its key back. */
    key: p.string().length(1).nullable(),
    description: p.string().length(500).default(""),
    /** Order in the catalogue. */
    position: p.integer(),
    retired: p.boolean().default(false),
  },
});
export type FaultTag = InferEntity<typeof FaultTag>;
