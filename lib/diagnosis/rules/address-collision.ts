// In: transactions of a capture in volts. Out: read bytes whose zeros stand at two levels: two targets answer one address. The
// wired-AND of two targets cannot be told from one on a logic-level capture.

import { addressText } from "../format";
import type { Rule } from "../rule";

export const addressCollision: Rule = {
  meta: {
    kind: "address-collision",
    clause: "UM10204 Rev 7 3.1.8; levels as REFERENCE 7 of the low-level fingerprint, inference",
  },
  watch: (findings) => ({
    transaction(row) {
      const moment = row.moments.find((candidate) => candidate.kind === "two-levels");
      if (moment === undefined) return;
      const text = `zeros read from ${addressText(row)} stand at two levels ${moment.volts.toFixed(2)} V apart: two drivers`;
      findings.add("address-collision", moment.tick, text, row.index);
    },
  }),
};
