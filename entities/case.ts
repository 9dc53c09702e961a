import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { type Settings, statuses } from "@/lib/case/case";
import { Team } from "./team";
import { User } from "./user";

/** What a team works on. Its captures, notes, tags and shares hang below it. */
export const Case = defineEntity({
  name: "Case",
  tableName: "cases",
  uniques: [{ properties: ["team", "number"] }],
  indexes: [{ properties: ["team", "updatedAt"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    team: () => p.manyToOne(Team).ref().deleteRule("cascade"),
    /** Counts from 1 in each team and is never given twice. */
    number: p.integer(),
    title: p.string().length(200),
    status: p.enum([...statuses]).default("open"),
    assignee: () => p.manyToOne(User).ref().nullable().deleteRule("set null").index(),
    finding: p.text().default(""),
    /** Read through lib/case/upgrade.ts. */
    settings: p.json<Settings>(),
    /** Next footnote number; it only grows, so a number once cited never means another note. */
    nextNote: p.integer().default(1),
    /** Rises with every edit of the fields above; edits name the one they were made on. */
    version: p.integer().version(),
    createdBy: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
    /** The last change of the case or of anything below it. */
    updatedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Case = InferEntity<typeof Case>;
