import { defineEntity, type InferEntity, p } from "@mikro-orm/core";
import { User } from "./user";

/** A mailed permission to set a new password once. */
export const Reset = defineEntity({
  name: "Reset",
  tableName: "resets",
  properties: {
    /** SHA-256 of the token in the mailed link. */
    tokenHash: p.string().length(64).primary(),
    user: () => p.manyToOne(User).ref().deleteRule("cascade").index(),
    createdAt: p.datetime().onCreate(() => new Date()),
    expiresAt: p.datetime(),
  },
});
export type Reset = InferEntity<typeof Reset>;
