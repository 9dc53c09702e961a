import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { eventKinds } from "@/lib/case/wire";
import { Case } from "./case";
import { User } from "./user";

/** One change of a case, with what stood there before and after. Rows are added and never changed. */
export const Event = defineEntity({
  name: "Event",
  tableName: "events",
  indexes: [{ properties: ["case", "at"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    case: () => p.manyToOne(Case).ref().deleteRule("cascade"),
    actor: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    kind: p.enum([...eventKinds]),
    words: p.string().length(400),
    before: p.json<Record<string, unknown>>().nullable(),
    after: p.json<Record<string, unknown>>().nullable(),
    /** For `case.edited`: the case's version after the edit; an edit made on an older one looks here for what changed since. */
    caseVersion: p.integer().nullable(),
    at: p.datetime().onCreate(() => new Date()),
  },
});
export type Event = InferEntity<typeof Event>;
