// In: transactions. Out: reserved addresses in use. Lawful where their special purpose is never used (UM10204 3.1.12), so this is
// a remark and not a failure.

import { KIND } from "../../engine/bus/address";
import { addressText } from "../format";
import type { Rule } from "../rule";

export const reservedAddress: Rule = {
  meta: { kind: "reserved-address", clause: "UM10204 Rev 7 Table 4" },
  watch: (findings) => ({
    transaction(row) {
      if (row.kind !== KIND.reserved) return;
      findings.add("reserved-address", row.startTick, `${addressText(row)} is reserved`, row.index);
    },
  }),
};
