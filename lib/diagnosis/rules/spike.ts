// In: pulses shorter than tSP. Out: those that stood where they could have done harm. A short SDA pulse while SCL is low is
// harmless, before and after the ninth bit it is the acknowledge handing over from one driver to the next: told apart, no fault.

import { seconds } from "../../base/time";
import { duration } from "../format";
import type { Rule } from "../rule";

export const spike: Rule = {
  meta: { kind: "spike", clause: "UM10204 Rev 7 Table 10, tSP" },
  watch: (findings) => ({
    spike(tick, width, line, sclHigh, slot) {
      if (line === "sda" && sclHigh === false) {
        findings.harmless(slot === 0 || slot === 8 ? "ack-handover" : "low-pulse", tick);
        return;
      }
      const wide = duration(seconds(width, findings.base));
      findings.add("spike", tick, `a pulse of ${wide} on ${line.toUpperCase()}, shorter than tSP, was not acted on`);
    },
  }),
};
