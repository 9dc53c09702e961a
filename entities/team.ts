import { defineEntity, type InferEntity, p } from "@mikro-orm/core";

/** People who share cases. Everything they keep hangs below one row of this table. */
export const Team = defineEntity({
  name: "Team",
  tableName: "teams",
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    name: p.string().length(120),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Team = InferEntity<typeof Team>;
