// In: transactions. Out: data bytes that the receiver refused. A controller's NACK that ends a read is lawful and no fault
// (UM10204 3.1.6 reason 5); one after which the read went on is.

import { CLOSE, KIND, READ } from "../../engine/bus/address";
import { NACK } from "../../engine/bus/transactions";
import { addressText, hex } from "../format";
import type { Rule } from "../rule";

export const dataNack: Rule = {
  meta: { kind: "data-nack", clause: "UM10204 Rev 7 3.1.6" },
  watch: (findings) => ({
    transaction(row) {
      if (row.kind === KIND.generalCall || row.kind === KIND.startByte || row.kind === KIND.hsCode || row.kind === KIND.busClear)
        return;
      // Clocks that free a held line frame into bytes that nobody sent.
      if (row.moments.some((moment) => moment.kind === "recovery")) return;
      const last = row.byteCount - 1;
      for (let n = row.addressBytes; n <= last; n++) {
        const i = row.at + n;
        if (row.bytes.ack[i] !== NACK || row.bytes.bits[i] !== 8) continue;
        const read = row.direction === READ;
        if (read && n === last) {
          if (row.closes !== CLOSE.none) findings.harmless("read-end-nack", row.bytes.endTick[i], row.index);
          return;
        }
        const nth = n - row.addressBytes;
        const text = read
          ? `the controller sent NACK for data byte ${nth} (${hex(row.bytes.value[i])}) from ${addressText(row)} and went on reading`
          : `data byte ${nth} (${hex(row.bytes.value[i])}) to ${addressText(row)} was not acknowledged`;
        findings.add("data-nack", row.bytes.endTick[i], text, row.index);
        return;
      }
    },
  }),
};
