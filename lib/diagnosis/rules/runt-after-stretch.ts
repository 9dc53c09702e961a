// In: stretches with the SCL high after them. Out: first highs after a stretch that are shorter than tHIGH: some controllers give
// a runt when SCL is let go, and devices may or may not count it.

import { ticks } from "../../base/time";
import { duration } from "../format";
import type { Rule } from "../rule";

export const runtAfterStretch: Rule = {
  meta: { kind: "runt-after-stretch", clause: "UM10204 Rev 7 Table 11 tHIGH, 3.1.9" },
  watch: (findings) => ({
    conclude(end) {
      for (const { start_s, low_s, runt_s, transaction, byte, bit } of end.stretches) {
        if (runt_s === undefined) continue;
        const text = `the first SCL high after a low of ${duration(low_s)} lasts only ${duration(runt_s)} (byte ${byte}, bit ${bit})`;
        findings.add("runt-after-stretch", ticks(start_s + low_s, findings.base), text, transaction);
      }
    },
  }),
};
