// In: how the record ends, or is cut. Out: a START that no clock follows: a pulse on SDA, hot plugging or noise, after which the
// bus counts as busy for ever.

import { seconds } from "../../base/time";
import { CLOSE } from "../../engine/bus/address";
import { duration } from "../format";
import type { Rule } from "../rule";

/** Bit times without a clock. Common practice, no source. */
const SILENT_BITS = 20;

export const phantomStart: Rule = {
  meta: { kind: "phantom-start", clause: "UM10204 Rev 7 3.1.4; common practice, no source" },
  watch: (findings) => {
    let start = Number.NaN;
    let index = -1;
    return {
      transaction(row) {
        start = row.pulses === 0 && row.closes === CLOSE.none ? row.startTick : Number.NaN;
        index = row.index;
      },
      conclude(end) {
        const silent = end.tail.endTick - start;
        if (!(silent > SILENT_BITS * end.period) && !(silent > 0 && Number.isNaN(end.period))) return;
        const text = duration(seconds(silent, findings.base));
        findings.add("phantom-start", start, `START with no clock after it for the remaining ${text} of the record`, index);
      },
    };
  },
};
