// In: transactions. Out: START followed at once by STOP, an illegal format that many devices tolerate (UM10204 3.1.10 note 5).

import { FLAG } from "../../engine/bus/transactions";
import type { Rule } from "../rule";

export const voidMessage: Rule = {
  meta: { kind: "void-message", clause: "UM10204 Rev 7 3.1.10 note 5" },
  watch: (findings) => {
    // The second half of an SDA pulse inside a byte looks like a void message and is none.
    let pulseBefore = false;
    return {
      transaction(row) {
        const isVoid = (row.flags & FLAG.voidMessage) !== 0;
        if (isVoid && !pulseBefore)
          findings.add("void-message", row.startTick, "START followed by STOP without any clock between", row.index);
        pulseBefore = row.moments.some((moment) => moment.kind === "pulse");
      },
    };
  },
};
