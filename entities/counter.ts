import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Team } from "./team";

/** The last case number a team has given out. One row a team, so that two new cases at once wait for each other. */
export const Counter = defineEntity({
  name: "Counter",
  tableName: "counters",
  properties: {
    team: () => p.manyToOne(Team).ref().primary().deleteRule("cascade"),
    lastCase: p.integer().default(0),
  },
});
export type Counter = InferEntity<typeof Counter>;
