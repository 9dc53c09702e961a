// In: transactions, and how the record ends. Out: transactions that nobody ended: SCL stood high for many bit times before the
// next START, or the record goes on without STOP after the last byte.

import { seconds } from "../../base/time";
import { CLOSE } from "../../engine/bus/address";
import { duration } from "../format";
import type { Rule } from "../rule";

/** Bit times without an edge after which a STOP is missing rather than late. Common practice, no source. */
const SILENT_BITS = 20;

export const missingStop: Rule = {
  meta: { kind: "missing-stop", clause: "UM10204 Rev 7 3.1.4" },
  watch: (findings) => {
    let lastIndex = -1;
    let lastEnd = 0;
    let lastOpen = false;
    let lastWhole = false;
    return {
      transaction(row) {
        lastIndex = row.index;
        lastEnd = row.endTick;
        lastOpen = row.closes === CLOSE.none;
        lastWhole = row.pulses > 0;
        for (const moment of row.moments) {
          if (moment.kind !== "late-start") continue;
          const idle = duration(seconds(moment.width, findings.base));
          findings.add("missing-stop", moment.tick, `no STOP: both lines were high for ${idle} before the next START`, row.index);
        }
      },
      conclude(end) {
        const { lines } = end;
        if (!lastOpen || !lastWhole || lines === null || lines.scl === 0 || lines.sda === 0) return;
        const silent = end.tail.endTick - lastEnd;
        if (!(silent > SILENT_BITS * end.period)) return;
        const idle = duration(seconds(silent, findings.base));
        findings.add(
          "missing-stop",
          lastEnd,
          `no STOP: the record ends ${idle} after the last clock with both lines high`,
          lastIndex,
        );
      },
    };
  },
};
