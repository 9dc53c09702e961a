// In: transactions. Out: SDA going and coming back within one SCL high inside a byte: noise or another driver, which a receiver
// takes for STOP and START (UM10204 3.1.3: data must be stable while SCL is high).

import { seconds } from "../../base/time";
import { duration } from "../format";
import type { Rule } from "../rule";

export const sdaChangeWhileHigh: Rule = {
  meta: { kind: "sda-change-while-high", clause: "UM10204 Rev 7 3.1.3" },
  watch: (findings) => ({
    transaction(row) {
      for (const moment of row.moments) {
        if (moment.kind !== "pulse") continue;
        const wide = duration(seconds(moment.width, findings.base));
        findings.add(
          "sda-change-while-high",
          moment.tick,
          `SDA changed and came back after ${wide} while SCL was high inside a byte`,
          row.index,
        );
      }
    },
  }),
};
