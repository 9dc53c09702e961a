// In: a row and what was found about it. Out: the words for it: its verdict in the stack, and one sentence for those who
// hear the page instead of seeing it.

import type { FaultKind, Summary } from "../diagnosis/report";
import { FAULT_WORDS } from "../diagnosis/wording";
import { address, beside, count, duration, hex } from "./format";
import type { Ledger, Row } from "./ledger";
import type { Marks, RowMarks } from "./marks";

export type Tone = "plain" | "broken" | "contest" | "accent";

export interface Verdict {
  readonly text: string;
  readonly tone: Tone;
}

/** What fits the last column of a row; the full words stand in lib/diagnosis/wording.ts. */
const SHORT_WORDS: Record<FaultKind, string> = {
  "address-nack": "no answer",
  "data-nack": "data not acknowledged",
  "missing-stop": "no STOP",
  "misplaced-start": "START inside a byte",
  "misplaced-stop": "STOP inside a byte",
  "short-byte": "short byte",
  "void-message": "void message",
  spike: "spike",
  "sda-change-while-high": "SDA moved while SCL high",
  "scl-stuck-low": "SCL held low",
  "sda-stuck-low": "SDA held low",
  "bus-clear": "bus clear",
  "phantom-start": "START without clock",
  "reserved-address": "reserved address",
  "pec-mismatch": "PEC does not match",
  "smbus-timeout": "SMBus timeout",
  "low-swing": "low swing",
  "slow-rise": "slow rise",
  "between-thresholds": "between thresholds",
  "address-collision": "two targets answer",
  "suspected-collision": "perhaps two targets",
  "runt-after-stretch": "runt after a stretch",
  "bit-slip": "bit slip",
  "look-alike": "looks like lost arbitration",
};

export function faultWords(kind: FaultKind): string {
  return SHORT_WORDS[kind];
}

/** How a whole capture stands, after its limits profile or its name. */
export const CAPTURE_WORDS: Record<Summary["verdict"], string> = { pass: "passes", fail: "fails", undecided: "not decided" };

/** Every verdict that applies, the gravest first. */
export function verdicts(row: Row, marks: RowMarks, all: Marks): Verdict[] {
  const list: Verdict[] = [];
  if (marks.contest) list.push({ text: `contest, bit ${marks.contest.bit_index}`, tone: "contest" });
  if (marks.retryOf !== null) list.push({ text: `retry of ${count(marks.retryOf)}`, tone: "contest" });
  const kinds = new Set(marks.faults.map((fault) => fault.kind));
  for (const kind of kinds) list.push({ text: SHORT_WORDS[kind], tone: FAULT_WORDS[kind].fails ? "broken" : "plain" });
  const parameters = new Set<string>();
  for (const violation of marks.violations) {
    if (parameters.has(violation.parameter)) continue;
    parameters.add(violation.parameter);
    const side = violation.side === "min" ? "below" : "above";
    list.push({
      text: `${violation.parameter} ${beside(violation.measured_s, violation.limit_s)}, ${side} limit`,
      tone: "broken",
    });
  }
  const worst = marks.stretches.reduce((most, stretch) => Math.max(most, stretch.excess_s), 0);
  if (worst > 0) list.push({ text: `stretched ${duration(worst)}`, tone: "plain" });
  if (list.length === 0 && all.complete) list.push({ text: "within limits", tone: "plain" });
  if (list.length === 0 && row.kind !== "normal") list.push({ text: row.kind.replaceAll("-", " "), tone: "plain" });
  return list;
}

/** The most bytes that are spelled out when a row is read aloud. */
const SPOKEN = 16;

export function rowSentence(ledger: Ledger, row: Row, found: readonly Verdict[], device: string | null): string {
  const where = row.address < 0 ? "no address" : `address ${address(row.address, row.addressBits)}${device ? `, ${device}` : ""}`;
  const way = row.direction === "R" ? "read" : row.direction === "W" ? "write" : "direction unknown";
  const bytes = ledger.bytes(row, SPOKEN + row.addressBytes).slice(row.addressBytes);
  const data = bytes.map((byte) => `${hex(byte.value)}${byte.ack === false ? " not acknowledged" : ""}`).join(" ");
  const more = row.byteCount - row.addressBytes - bytes.length;
  const ending = row.closes === "P" ? "ends with STOP" : row.closes === "Sr" ? "ends with repeated START" : "has no STOP";
  return [
    `Transaction ${row.index}, ${where}, ${way}`,
    data === "" ? "no data" : `data ${data}${more > 0 ? ` and ${count(more)} more` : ""}`,
    ending,
    ...found.map((verdict) => verdict.text),
  ].join("; ");
}
