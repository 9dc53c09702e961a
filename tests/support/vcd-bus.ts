// In: what is said on a bus. Out: the changes of SCL and SDA that say it, for tests of the channel finder, the VCD reader and
// the archive. Times in ticks of the test's own choosing.

import type { LineTrace } from "@/lib/engine/channels/trace";

/** "S", "Sr", "P", or a byte with its acknowledge. */
export type Said = "S" | "Sr" | "P" | readonly [value: number, ack: boolean];

export interface Change {
  readonly tick: number;
  readonly line: "scl" | "sda";
  readonly level: 0 | 1;
}

/** Levels at both lines high at tick 0; a quarter of an SCL period is `quarter` ticks. */
export function changesOf(said: readonly Said[], quarter = 25, from = 1000): { changes: Change[]; end: number } {
  const changes: Change[] = [];
  let at = from;
  let sda = 1;
  let scl = 1;
  const drive = (line: "scl" | "sda", level: 0 | 1) => {
    if ((line === "scl" ? scl : sda) === level) return;
    if (line === "scl") scl = level;
    else sda = level;
    changes.push({ tick: at, line, level });
  };
  const bit = (level: 0 | 1) => {
    at += quarter;
    drive("sda", level);
    at += quarter;
    drive("scl", 1);
    at += 2 * quarter;
    drive("scl", 0);
  };
  for (const item of said) {
    if (item === "P") {
      at += quarter;
      drive("sda", 0);
      at += quarter;
      drive("scl", 1);
      at += quarter;
      drive("sda", 1);
      at += 8 * quarter;
    } else if (item === "S" || item === "Sr") {
      if (item === "Sr") {
        at += quarter;
        drive("sda", 1);
        at += quarter;
        drive("scl", 1);
        at += quarter;
      }
      drive("sda", 0);
      at += quarter;
      drive("scl", 0);
    } else {
      for (let i = 7; i >= 0; i--) bit(((item[0] >> i) & 1) as 0 | 1);
      bit(item[1] ? 0 : 1);
    }
  }
  return { changes, end: at + 8 * quarter };
}

/** One line of it as the channel finder is given it. */
export function traceOf(changes: readonly Change[], line: "scl" | "sda", id: string, name = id): LineTrace {
  const own = changes.filter((change) => change.line === line);
  return {
    id,
    name,
    initial: 1,
    length: own.length,
    ticks: Float64Array.from(own, (change) => change.tick),
    levels: Uint8Array.from(own, (change) => change.level),
  };
}

/** A line made from alternating levels at the given ticks. */
export function lineAt(ticks: readonly number[], id: string, initial: 0 | 1 = 0, name = id): LineTrace {
  return {
    id,
    name,
    initial,
    length: ticks.length,
    ticks: Float64Array.from(ticks),
    levels: Uint8Array.from(ticks, (_, i) => (i % 2 === 0 ? 1 - initial : initial)),
  };
}

/** A write of the given bytes to a 7-bit address, all acknowledged. */
export function write(address: number, ...bytes: number[]): Said[] {
  return ["S", [address * 2, true], ...bytes.map((value): Said => [value, true]), "P"];
}
