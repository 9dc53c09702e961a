// In: transactions and measurements of a capture in volts. Out: rises too slow for the bus: SDA still rising when SCL had risen,
// or a rise time beyond the profile's limit (UM10204 7.1).

import { seconds } from "../../base/time";
import { duration } from "../format";
import type { Rule } from "../rule";

export const slowRise: Rule = {
  meta: { kind: "slow-rise", clause: "UM10204 Rev 7 7.1, Table 11 tr" },
  watch: (findings) => ({
    transaction(row) {
      const moment = row.moments.find((candidate) => candidate.kind === "slow-rise");
      if (moment === undefined) return;
      const text = `SDA was still rising when SCL had risen; it took ${duration(seconds(moment.width, findings.base))} from 30 % to 70 %`;
      findings.add("slow-rise", moment.tick, text, row.index);
    },
    conclude(end) {
      const told = new Set<number | null>();
      for (const row of end.rows) {
        if (!row.symbol.startsWith("tr")) continue;
        for (const slow of row.violations) {
          if (slow.side !== "max" || told.has(slow.transaction)) continue;
          told.add(slow.transaction);
          const text = `${row.symbol} ${duration(slow.measured)}, limit ${duration(slow.limit)}`;
          findings.add("slow-rise", Math.round(slow.at * findings.base.ticksPerSecond), text, slow.transaction);
        }
      }
    },
  }),
};
