// In: transactions. Out: a STOP inside a byte. One half of an SDA pulse is told by sda-change-while-high instead.

import { FLAG } from "../../engine/bus/transactions";
import { brokenPlace } from "../format";
import type { Rule } from "../rule";

export const misplacedStop: Rule = {
  meta: { kind: "misplaced-stop", clause: "UM10204 Rev 7 3.1.5" },
  watch: (findings) => ({
    transaction(row) {
      if (
        (row.flags & FLAG.misplacedStop) === 0 ||
        row.moments.some((moment) => moment.kind === "pulse" || moment.kind === "recovery")
      )
        return;
      findings.add("misplaced-stop", row.endTick, `STOP ${brokenPlace(row)}`, row.index);
    },
  }),
};
