// In: transactions, and how the record ends. Out: SDA held low under a high SCL for many bit times, since which edge, and who had
// the line last (UM10204 3.1.16).

import { seconds } from "../../base/time";
import { duration, lastDriver } from "../format";
import type { Moment } from "../moments";
import type { Rule } from "../rule";

/** Bit times. Common practice, no source. */
const STUCK_BITS = 20;

export const sdaStuckLow: Rule = {
  meta: { kind: "sda-stuck-low", clause: "UM10204 Rev 7 3.1.16" },
  watch: (findings) => {
    const add = (moment: Moment, transaction: number | null) => {
      const since = Number.isNaN(moment.sdaFell) ? moment.tick : moment.sdaFell;
      const held = duration(seconds(moment.tick + moment.width - since, findings.base));
      const who = transaction === null ? "no transaction was open" : lastDriver(moment.pulse, moment.read);
      findings.add("sda-stuck-low", since, `SDA stayed low for ${held} while SCL was high; ${who}`, transaction);
    };
    return {
      transaction(row) {
        for (const moment of row.moments) if (moment.kind === "held-sda") add(moment, row.index);
      },
      conclude(end) {
        for (const moment of end.outside) if (moment.kind === "held-sda") add(moment, null);
        const { lines, tail, period } = end;
        if (lines === null || lines.scl === 0 || lines.sda === 1) return;
        const since = Math.max(lines.sclSince, lines.sdaSince);
        const held = tail.endTick - since;
        const phantom = end.lastTransaction >= 0 && end.lastPulses === 0 && lines.sdaSince > lines.sclSince;
        if (!(held > STUCK_BITS * period) || phantom) return;
        const text = duration(seconds(tail.endTick - lines.sdaSince, findings.base));
        findings.add("sda-stuck-low", lines.sdaSince, `SDA was low from here to the end of the record, ${text}, with SCL high`);
      },
    };
  },
};
