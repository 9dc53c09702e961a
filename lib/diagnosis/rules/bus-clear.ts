// In: transactions and clocks outside them. Out: attempts to free a held SDA by clocks, and on which clock it came free
// (UM10204 3.1.16: nine pulses).

import { KIND } from "../../engine/bus/address";
import type { Moment } from "../moments";
import type { Rule } from "../rule";

export const busClear: Rule = {
  meta: { kind: "bus-clear", clause: "UM10204 Rev 7 3.1.16" },
  watch: (findings) => {
    const add = (moment: Moment, transaction: number | null) => {
      const freed = moment.count > 0 ? `SDA was free on clock ${moment.count}` : "SDA stayed low throughout";
      findings.add("bus-clear", moment.tick, `clocks were given to free the bus; ${freed}`, transaction);
    };
    return {
      transaction(row) {
        const moment = row.moments.find((candidate) => candidate.kind === "recovery");
        if (moment !== undefined) add(moment, row.index);
        else if (row.kind === KIND.busClear)
          findings.add(
            "bus-clear",
            row.startTick,
            "nine clocks with SDA released: a bus clear; SDA was free from the first",
            row.index,
          );
      },
      conclude(end) {
        for (const moment of end.outside) if (moment.kind === "recovery") add(moment, null);
      },
    };
  },
};
