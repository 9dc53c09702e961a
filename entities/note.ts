import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { Anchor } from "@/lib/case/case";
import { Capture } from "./capture";
import { Case } from "./case";
import { User } from "./user";

/** A numbered footnote: its number stands on the trace, its text in the margin. */
export const Note = defineEntity({
  name: "Note",
  tableName: "notes",
  uniques: [{ properties: ["case", "number"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    case: () => p.manyToOne(Case).ref().deleteRule("cascade"),
    /** Null for a note on the whole case. */
    capture: () => p.manyToOne(Capture).ref().nullable().deleteRule("cascade").index(),
    number: p.integer(),
    anchor: p.json<Anchor>(),
    text: p.text(),
    author: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    version: p.integer().version(),
    createdAt: p.datetime().onCreate(() => new Date()),
    editedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Note = InferEntity<typeof Note>;
