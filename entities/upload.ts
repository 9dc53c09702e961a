import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { Capture } from "./capture";
import { Case } from "./case";
import { User } from "./user";

/** A file on its way into storage. It is not a capture until the server has checked every byte. */
export const Upload = defineEntity({
  name: "Upload",
  tableName: "uploads",
  indexes: [{ properties: ["owner", "state"] }, { properties: ["state", "touchedAt"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    case: () => p.manyToOne(Case).ref().deleteRule("cascade").index(),
    owner: () => p.manyToOne(User).ref().deleteRule("cascade"),
    name: p.string().length(255),
    size: p.bigint("number"),
    partSize: p.integer(),
    parts: p.integer(),
    key: p.string().length(500).unique(),
    /** The multipart upload's id in storage. */
    storageId: p.string().length(1024),
    /** SHA-256 the owner announced for each part, by part number; what storage holds must match. */
    checksums: p.json<Record<string, string>>(),
    state: p.enum(["open", "checking", "complete", "refused", "cancelled"]).default("open"),
    capture: () => p.manyToOne(Capture).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
    touchedAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Upload = InferEntity<typeof Upload>;
