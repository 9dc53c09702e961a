// In: what forensics concluded. Out: mechanisms that make a controller report lost arbitration with no contest on the bus.

import { ticks } from "../../base/time";
import type { Rule } from "../rule";

export const lookAlike: Rule = {
  meta: { kind: "look-alike", clause: "UM10204 Rev 7 3.1.8" },
  watch: (findings) => ({
    conclude(end) {
      for (const fault of end.lookAlikes)
        findings.add("look-alike", ticks(fault.time_s, findings.base), fault.detail, fault.transaction);
    },
  }),
};
