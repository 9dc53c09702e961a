// In: transactions of a capture in volts. Out: lows that are not low enough and highs that are not high enough, though both
// still cross the thresholds (UM10204 Table 10: VOL 0.4 V above 2 V supply, 0.2 VDD below).

import type { Rule } from "../rule";

export const lowSwing: Rule = {
  meta: { kind: "low-swing", clause: "UM10204 Rev 7 Table 10, VOL and VnH" },
  watch: (findings) => ({
    transaction(row) {
      const moment = row.moments.find((candidate) => candidate.kind === "low-swing");
      if (moment === undefined) return;
      findings.add("low-swing", moment.tick, `a line stood at ${moment.volts.toFixed(2)} V, short of its full swing`, row.index);
    },
  }),
};
