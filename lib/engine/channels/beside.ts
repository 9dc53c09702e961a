// In: the chosen pair and every other line. Out: what else the file holds: copies of the same signal, drive taps, other buses.

import type { Warning } from "../../base/result";
import { buffered, drives, identical } from "./behaviour";
import { LINES_TRIED, type Line, label, type Pair } from "./line";
import { convincing } from "./pair";
import type { LineTrace } from "./trace";

const copied = (of: LineTrace, line: LineTrace) => line.length > 0 && (identical(of, line) || buffered(of, line));

export function copiesOf(pair: Pair, all: readonly Line[]): string[] {
  const copies: string[] = [];
  for (const line of all) {
    if (line.trace.id === pair.scl.trace.id || line.trace.id === pair.sda.trace.id) continue;
    for (const chosenLine of [pair.scl, pair.sda]) {
      if (copied(chosenLine.trace, line.trace)) copies.push(label(line));
    }
  }
  return copies;
}

/** Lines that pull only while the bus is low: said, never used unasked. */
export function tapsOf(pair: Pair, lines: readonly Line[]): Warning | null {
  const taps: string[] = [];
  for (const line of lines.slice(0, LINES_TRIED)) {
    if (line.trace.id === pair.scl.trace.id || line.trace.id === pair.sda.trace.id || line.clue.strength < 2) continue;
    const bus = line.clue.line === "scl" ? pair.scl.trace : pair.sda.trace;
    if (buffered(bus, line.trace)) continue;
    if (drives(line.trace, 0, bus)) taps.push(`${label(line)} (1 releases)`);
    else if (drives(line.trace, 1, bus)) taps.push(`${label(line)} (1 drives)`);
  }
  if (taps.length === 0) return null;
  return {
    code: "tap-channels",
    message: `${taps.join(", ")} ${taps.length === 1 ? "pulls" : "pull"} only while the bus is low: drive taps by the look of them. Name them as taps to use them.`,
    count: taps.length,
  };
}

/** Another well-named pair that decodes as well and drives nothing of this one. */
export function otherBuses(pair: Pair, named: readonly Pair[]): Warning | null {
  const others = named.filter(
    (other) =>
      other.scl.clue.strength === 3 &&
      other.sda.clue.strength === 3 &&
      other.scl.clue.stem === other.sda.clue.stem &&
      other.scl.trace.id !== pair.scl.trace.id &&
      other.sda.trace.id !== pair.sda.trace.id &&
      // The same traffic on other lines (a line in volts beside its level, say) is no other bus.
      other.count.firstBytes !== pair.count.firstBytes &&
      convincing(other.count) &&
      !drives(other.sda.trace, 0, pair.sda.trace),
  );
  if (others.length === 0) return null;
  const names = others.slice(0, 4).map((other) => `${label(other.scl)} with ${label(other.sda)}`);
  return {
    code: "other-buses",
    message: `The file holds more than one bus: also ${names.join("; ")}. Name the channels to read another.`,
    count: others.length,
  };
}
