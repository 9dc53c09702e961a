// In: a message. Out: what its controller has to do at each SCL pulse. UM10204 3.1.3 - 3.1.11.

import type { Segment } from "./scenario";

export type Step =
  /** A bit this controller drives itself and therefore checks: address, write data, acknowledge of a read. */
  | { readonly kind: "own"; readonly value: 0 | 1; readonly first: boolean }
  /** A bit a target drives: acknowledge of a write (ack true) or read data. */
  | { readonly kind: "theirs"; readonly ack: boolean; readonly first: boolean }
  | { readonly kind: "repeat" }
  | { readonly kind: "stop" };

export function scriptOf(message: readonly Segment[]): Step[] {
  const steps: Step[] = [];
  message.forEach((segment, index) => {
    if (index > 0) steps.push({ kind: "repeat" });
    segment.addressBytes.forEach((byte, i) => {
      own(steps, byte, i > 0);
      steps.push({ kind: "theirs", ack: true, first: false });
    });
    for (const byte of segment.bytes) {
      own(steps, byte, true);
      steps.push({ kind: "theirs", ack: true, first: false });
    }
    for (let i = 0; i < segment.count; i++) {
      for (let bit = 0; bit < 8; bit++) steps.push({ kind: "theirs", ack: false, first: bit === 0 });
      steps.push({ kind: "own", value: i === segment.count - 1 ? 1 : 0, first: false });
    }
  });
  steps.push({ kind: "stop" });
  return steps;
}

function own(steps: Step[], byte: number, pausable: boolean): void {
  for (let bit = 7; bit >= 0; bit--) {
    steps.push({ kind: "own", value: ((byte >> bit) & 1) as 0 | 1, first: pausable && bit === 7 });
  }
}

/** A write of `bytes` to a 7-bit address. */
export function write(address: number, bytes: readonly number[]): Segment {
  return { addressBytes: [address << 1], bytes, count: 0 };
}

/** A read of `count` bytes from a 7-bit address. */
export function read(address: number, count: number): Segment {
  return { addressBytes: [(address << 1) | 1], bytes: [], count };
}
