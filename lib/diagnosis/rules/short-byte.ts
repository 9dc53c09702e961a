// In: transactions. Out: bytes of fewer than eight bits, where the bus and not the end of the record cut them short.

import { CLOSE } from "../../engine/bus/address";
import { FLAG } from "../../engine/bus/transactions";
import { brokenPlace } from "../format";
import type { Rule } from "../rule";

export const shortByte: Rule = {
  meta: { kind: "short-byte", clause: "UM10204 Rev 7 3.1.5" },
  watch: (findings) => ({
    transaction(row) {
      if ((row.flags & FLAG.shortByte) === 0 || row.closes === CLOSE.none) return;
      if (row.moments.some((moment) => moment.kind === "recovery")) return;
      const last = row.at + row.byteCount - 1;
      if (row.bytes.bits[last] >= 8) return;
      findings.add("short-byte", row.bytes.startTick[last], `a byte broke off ${brokenPlace(row)}`, row.index);
    },
  }),
};
