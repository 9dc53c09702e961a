// In: what the comparator saw of a capture in volts. Out: visits between the thresholds that never became a level: receivers may
// or may not have taken them for an edge. On SDA while SCL is low nobody looks: those are harmless. A dip that crosses no threshold
// is not listed.

import { seconds } from "../../base/time";
import { duration } from "../format";
import type { Rule } from "../rule";

export const betweenThresholds: Rule = {
  meta: { kind: "between-thresholds", clause: "UM10204 Rev 7 Table 10, VIL and VIH" },
  watch: (findings) => ({
    conclude(end) {
      const { vih_v } = end.head;
      for (const { line, tick, width, extreme_v } of end.tail.excursions) {
        if (vih_v !== null && extreme_v >= vih_v) {
          findings.harmless("crosstalk-dip", tick);
          continue;
        }
        const slot = line === "sda" ? end.lowSlot(tick, width) : null;
        if (slot !== null) {
          findings.harmless(slot === 0 || slot === 8 ? "ack-handover" : "low-pulse", tick);
          continue;
        }
        const wide = duration(seconds(width, findings.base));
        findings.add("between-thresholds", tick, `${line.toUpperCase()} went to ${extreme_v.toFixed(2)} V for ${wide} and back`);
      }
    },
  }),
};
