import { defineEntity, type InferEntity, p } from "@mikro-orm/core";

/** How often something was tried in the current window; shared by every copy of the application. */
export const Throttle = defineEntity({
  name: "Throttle",
  tableName: "throttles",
  properties: {
    /** Rule and who it counts, hashed: `sign-in:` and 64 hexadecimal digits. */
    key: p.string().length(120).primary(),
    count: p.integer(),
    endsAt: p.datetime().index(),
  },
});
export type Throttle = InferEntity<typeof Throttle>;
