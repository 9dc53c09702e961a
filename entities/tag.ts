import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { Anchor } from "@/lib/case/case";
import { Capture } from "./capture";
import { FaultTag } from "./fault-tag";
import { User } from "./user";

/** A fault tag put on a transaction or a stretch of time. */
export const Tag = defineEntity({
  name: "Tag",
  tableName: "tags",
  uniques: [{ properties: ["capture", "place", "faultTag"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    capture: () => p.manyToOne(Capture).ref().deleteRule("cascade"),
    faultTag: () => p.manyToOne(FaultTag).ref().deleteRule("cascade").index(),
    anchor: p.json<Anchor>(),
    /** The anchor as one word, for the unique key: `t12`, `r100-250`, `w`. */
    place: p.string().length(60),
    remark: p.string().length(500).default(""),
    author: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Tag = InferEntity<typeof Tag>;
