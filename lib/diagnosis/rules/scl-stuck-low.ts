// In: how the record ends. Out: SCL held low and never released. I2C sets no limit to stretching (UM10204 3.1.9), so a low that
// ends is a stretch and not this fault.

import { seconds } from "../../base/time";
import { CLOSE } from "../../engine/bus/address";
import { duration, lastDriver } from "../format";
import type { Rule } from "../rule";

/** Bit times. Common practice, no source. */
const STUCK_BITS = 50;

export const sclStuckLow: Rule = {
  meta: { kind: "scl-stuck-low", clause: "UM10204 Rev 7 3.1.16" },
  watch: (findings) => {
    let read = false;
    return {
      transaction(row) {
        read = row.direction === 1;
      },
      conclude(end) {
        const { lines, tail, period } = end;
        if (lines === null || lines.scl === 1) return;
        const held = tail.endTick - lines.sclSince;
        if (!(held > STUCK_BITS * period)) return;
        const open = end.lastCloses === CLOSE.none && end.lastTransaction >= 0;
        const who = open ? lastDriver(end.lastPulses, read) : "no transaction was open";
        findings.add(
          "scl-stuck-low",
          lines.sclSince,
          `SCL was low from here to the end of the record, ${duration(seconds(held, findings.base))}; ${who}`,
          open ? end.lastTransaction : null,
        );
      },
    };
  },
};
