// In: transactions. Out: a runt on SCL after which the byte count is off: some device counted a clock that others did not.

import { seconds } from "../../base/time";
import { FLAG } from "../../engine/bus/transactions";
import { duration } from "../format";
import type { Rule } from "../rule";

export const bitSlip: Rule = {
  meta: { kind: "bit-slip", clause: "UM10204 Rev 7 Table 11 tHIGH; common practice, no source" },
  watch: (findings) => ({
    transaction(row) {
      const moment = row.moments.find((candidate) => candidate.kind === "runt");
      if (moment === undefined || (row.flags & FLAG.shortByte) === 0) return;
      const text = `an SCL high of only ${duration(seconds(moment.width, findings.base))} at clock ${moment.pulse}; from there the bits are off by one`;
      findings.add("bit-slip", moment.tick, text, row.index);
    },
  }),
};
