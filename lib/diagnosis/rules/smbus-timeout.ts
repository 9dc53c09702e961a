// In: transactions, measurements and how the record ends. Out: clock lows and sums of stretching beyond SMBus's time-outs. Only
// where an SMBus profile judges: I2C sets no limit (UM10204 3.1.9, 4.2.2).

import { seconds } from "../../base/time";
import { duration } from "../format";
import type { Moment } from "../moments";
import type { Rule } from "../rule";

const GIVE_UP_S = 25e-3;
const MUST_RESET_S = 35e-3;
const KEPT = 10_000;

export const smbusTimeout: Rule = {
  meta: { kind: "smbus-timeout", clause: "SMBus tTIMEOUT, tLOW:SEXT, tLOW:MEXT (RM0440 39.4.12)" },
  watch: (findings) => {
    const lows: { moment: Moment; transaction: number | null }[] = [];
    return {
      transaction(row) {
        for (const moment of row.moments) {
          if (moment.kind === "long-low" && lows.length < KEPT) lows.push({ moment, transaction: row.index });
        }
      },
      conclude(end) {
        if (end.profile === null || end.profile.spec !== "SMBus") return;
        for (const moment of end.outside) if (moment.kind === "long-low") lows.push({ moment, transaction: null });
        for (const { moment, transaction } of lows) {
          findings.add("smbus-timeout", moment.tick, lowText(seconds(moment.width, findings.base)), transaction);
        }
        const { lines } = end;
        if (lines !== null && lines.scl === 0) {
          const held = seconds(end.tail.endTick - lines.sclSince, findings.base);
          if (held >= GIVE_UP_S) findings.add("smbus-timeout", lines.sclSince, lowText(held));
        }
        for (const row of end.rows) {
          if (row.symbol !== "tLOW:SEXT" && row.symbol !== "tLOW:MEXT") continue;
          for (const over of row.violations) {
            const text = `${row.symbol}: ${duration(over.measured)} of stretching, limit ${duration(over.limit)}`;
            findings.add("smbus-timeout", Math.round(over.at * findings.base.ticksPerSecond), text, over.transaction);
          }
        }
      },
    };
  },
};

function lowText(held: number): string {
  const reset = held >= MUST_RESET_S ? "every device must have reset its interface (35 ms)" : "devices may give up (25 ms)";
  return `SCL was low for ${duration(held)}; ${reset}`;
}
