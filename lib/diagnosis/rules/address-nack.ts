// In: transactions. Out: addresses that nobody acknowledged. Lawful where nobody may or need answer: general call, START byte,
// Hs controller code (never acknowledged), reserved addresses.

import { KIND } from "../../engine/bus/address";
import { NACK } from "../../engine/bus/transactions";
import { addressText } from "../format";
import type { Rule } from "../rule";

const ANSWERED = new Set<number>([KIND.normal, KIND.deviceId, KIND.broken]);

export const addressNack: Rule = {
  meta: { kind: "address-nack", clause: "UM10204 Rev 7 3.1.6" },
  watch: (findings) => ({
    transaction(row) {
      if (row.addressAck !== NACK || !ANSWERED.has(row.kind)) return;
      const nth = row.addressBytes - 1;
      findings.add("address-nack", row.bytes.endTick[row.at + nth], `${addressText(row)} was not acknowledged`, row.index);
    },
  }),
};
