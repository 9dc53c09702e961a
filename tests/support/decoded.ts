// Runs the real decoder over blocks and gives its results as plain objects, for tests.

import type { Spike } from "@/lib/engine/bits/bits";
import { ACK, CLOSES, DIRECTIONS, KINDS, NO_ACK_BIT, NO_ADDRESS, OPENS } from "@/lib/engine/bus/transactions";
import { createDecoder } from "@/lib/engine/decode";
import type { DecodeHead, Remnant } from "@/lib/engine/decoder";
import type { EdgeBlock } from "@/lib/engine/samples/edges";

export interface Decoded {
  transactions: {
    start: number;
    end: number;
    opens: string;
    closes: string;
    kind: string;
    address: number | null;
    addressBits: number;
    direction: string | null;
    addressAck: boolean | null;
    addressBytes: number;
    flags: number;
    pulses: number;
    bytes: { value: number; bits: number; ack: boolean | null }[];
  }[];
  bits: {
    kind: number;
    value: number;
    flags: number;
    tick: number;
    fall: number;
    end: number;
    sdaFirst: number;
    sdaLast: number;
  }[];
  spikes: Spike[];
  remnants: Remnant[];
}

export const TICK_HEAD: DecodeHead = { timebase: { ticksPerSecond: 1, origin: "assumed" }, levels: "digital", sampleTicks: 1 };

function ackOf(value: number): boolean | null {
  return value === NO_ACK_BIT ? null : value === ACK;
}

export function decodeBlocks(blocks: readonly EdgeBlock[], endTick: number, head: DecodeHead = TICK_HEAD): Decoded {
  const out: Decoded = { transactions: [], bits: [], spikes: [], remnants: [] };
  const decoder = createDecoder(head, {
    bits(b) {
      for (let i = 0; i < b.length; i++) {
        const { kind, value, flags, tick, fall, end, sdaFirst, sdaLast } = b;
        out.bits.push({
          kind: kind[i],
          value: value[i],
          flags: flags[i],
          tick: tick[i],
          fall: fall[i],
          end: end[i],
          sdaFirst: sdaFirst[i],
          sdaLast: sdaLast[i],
        });
      }
    },
    transactions(t, bytes) {
      for (let i = 0; i < t.length; i++) {
        const from = t.firstByte[i] - bytes.first;
        const own = Array.from({ length: t.byteCount[i] }, (_, k) => ({
          value: bytes.value[from + k],
          bits: bytes.bits[from + k],
          ack: ackOf(bytes.ack[from + k]),
        }));
        out.transactions.push({
          start: t.startTick[i],
          end: t.endTick[i],
          opens: OPENS[t.opens[i]],
          closes: CLOSES[t.closes[i]],
          kind: KINDS[t.kind[i]],
          address: t.address[i] === NO_ADDRESS ? null : t.address[i],
          addressBits: t.addressBits[i],
          direction: DIRECTIONS[t.direction[i]],
          addressAck: ackOf(t.addressAck[i]),
          addressBytes: t.addressBytes[i],
          flags: t.flags[i],
          pulses: t.pulses[i],
          bytes: own,
        });
      }
    },
    spike: (s) => out.spikes.push(s),
    remnant: (r) => out.remnants.push(r),
  });
  for (const block of blocks) decoder.push(block);
  decoder.finish(endTick);
  return out;
}
