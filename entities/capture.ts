import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import type { Timebase } from "@/lib/base/time";
import type { Read } from "@/lib/case/case";
import type { Summary } from "@/lib/diagnosis/report";
import { Case } from "./case";
import { User } from "./user";

/** One recording that was uploaded and checked. Transactions are never rows: they are read again from the archive. */
export const Capture = defineEntity({
  name: "Capture",
  tableName: "captures",
  uniques: [{ properties: ["case", "ordinal"] }],
  properties: {
    id: p
      .uuid()
      .primary()
      .onCreate(() => crypto.randomUUID()),
    case: () => p.manyToOne(Case).ref().deleteRule("cascade"),
    ordinal: p.integer(),
    /** The file's name as the person had it. */
    name: p.string().length(255),
    size: p.bigint("number"),
    /** Of the whole file, computed by the server from what storage holds. */
    sha256: p.string().length(64),
    /** Storage key of the original. */
    key: p.string().length(500).unique(),
    /** What the person answered to the reader. */
    read: p.json<Read>(),
    /** Text of the controller log imported with it. */
    log: p.text().nullable(),
    archiveKey: p.string().length(500).nullable(),
    archiveSize: p.bigint("number").nullable(),
    timebase: p.json<Timebase>().nullable(),
    /** Can be large: left out of every read that does not show it. */
    summary: p.json<Summary>().nullable(),
    /** Taken out of the summary for lists. */
    verdict: p.enum(["pass", "fail", "undecided"]).nullable(),
    transactions: p.integer().default(0),
    faults: p.integer().default(0),
    contests: p.integer().default(0),
    uploadedBy: () => p.manyToOne(User).ref().nullable().deleteRule("set null"),
    createdAt: p.datetime().onCreate(() => new Date()),
  },
});
export type Capture = InferEntity<typeof Capture>;
