// In: transactions. Out: a START inside a byte of the transaction before it. It resets every device's bus logic even so
// (UM10204 3.1.10 note 4). One half of an SDA pulse is told by sda-change-while-high instead.

import { FLAG } from "../../engine/bus/transactions";
import { brokenPlace } from "../format";
import type { Rule } from "../rule";

export const misplacedStart: Rule = {
  meta: { kind: "misplaced-start", clause: "UM10204 Rev 7 3.1.10 note 4" },
  watch: (findings) => ({
    transaction(row) {
      if (
        (row.flags & FLAG.misplacedStart) === 0 ||
        row.moments.some((moment) => moment.kind === "pulse" || moment.kind === "recovery")
      )
        return;
      findings.add("misplaced-start", row.endTick, `START ${brokenPlace(row)}`, row.index);
    },
  }),
};
