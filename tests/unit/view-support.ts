import type { ByteBlock, TransactionBlock } from "@/lib/engine/bus/transactions";
import { createDecoder } from "@/lib/engine/decode";
import { type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "@/lib/engine/samples/edges";
import { EdgeColumns } from "@/lib/view/edges";
import { Ledger } from "@/lib/view/ledger";

// Two lines of marks become edges: "#" high, "_" low, "?" unknown. One character is `step` ticks.

const LEVEL: Record<string, number> = { "#": 1, _: 0, "?": 2 };

export function edgesOf(scl: string, sda: string, step = 10): EdgeBlock {
  const ticks: number[] = [];
  const lines: number[] = [];
  let last = -1;
  for (let k = 0; k < scl.length; k++) {
    const [one, other] = [LEVEL[scl[k]], LEVEL[sda[k]]];
    const now = (one === 1 ? SCL : one === 2 ? SCL_UNKNOWN : 0) | (other === 1 ? SDA : other === 2 ? SDA_UNKNOWN : 0);
    if (now === last) continue;
    ticks.push(k * step);
    lines.push(now);
    last = now;
  }
  return { length: ticks.length, ticks: Float64Array.from(ticks), lines: Uint8Array.from(lines), volts: null };
}

/** The same edges cut into blocks of at most `most`. */
export function split(block: EdgeBlock, most: number): EdgeBlock[] {
  const parts: EdgeBlock[] = [];
  for (let from = 0; from < block.length; from += most) {
    const to = Math.min(block.length, from + most);
    parts.push({ length: to - from, ticks: block.ticks.slice(from, to), lines: block.lines.slice(from, to), volts: null });
  }
  return parts;
}

/** Lines of one message: bytes with their acknowledge bit, START to STOP, `bit` characters a bit. */
export function message(bytes: readonly (readonly [number, 0 | 1])[], idle = 8): { scl: string; sda: string } {
  let scl = "#".repeat(idle);
  let sda = `${"#".repeat(idle - 2)}__`;
  const bit = (value: number) => {
    scl += "____##";
    sda += (value ? "#" : "_").repeat(6);
  };
  // SDA changes two characters after SCL falls.
  scl += "__";
  sda += "__";
  for (const [value, ack] of bytes) {
    for (let k = 7; k >= 0; k--) bit((value >> k) & 1);
    bit(ack ? 0 : 1);
  }
  scl += "____####";
  sda += "______##";
  return { scl, sda };
}

export interface Read {
  readonly edges: EdgeColumns;
  readonly ledger: Ledger;
  readonly ticksPerSecond: number;
}

/** Decodes edges with the real decoder into the page's columns. */
export function readEdges(blocks: readonly EdgeBlock[], endTick: number, ticksPerSecond = 1e8): Read {
  const edges = new EdgeColumns();
  const ledger = new Ledger();
  const decoder = createDecoder(
    { timebase: { ticksPerSecond, origin: "file" }, levels: "digital", sampleTicks: 1 },
    {
      bits: () => undefined,
      transactions: (block: TransactionBlock, bytes: ByteBlock) => ledger.append(block, bytes),
      spike: () => undefined,
      remnant: () => undefined,
    },
  );
  for (const block of blocks) {
    edges.append(block);
    decoder.push(block);
  }
  decoder.finish(endTick);
  return { edges, ledger, ticksPerSecond };
}
