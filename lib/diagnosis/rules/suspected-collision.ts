// In: transactions of a logic-level capture. Out: reads in which SDA was let go and pulled low again within one SCL low, between two
// zeros of a data byte. Two targets on one address that send different bytes do that: one answers 0 then 1, the other 1 then 0, and
// their delays after the SCL fall differ. The bytes alone never tell it: a wired-AND is a byte like any other, and sensors change.

import { seconds } from "../../base/time";
import { KIND, READ } from "../../engine/bus/address";
import { addressText, duration } from "../format";
import type { Row, Rule } from "../rule";

/** Reads that must show it, and the share of all adjacent zeros that must not: a target that lets go before each bit shows it always. */
const READS = 3;
const ALWAYS = 0.9;
/** Widths of two fixed delays' difference agree within this share of the median, or two samples. */
const SPREAD = 0.25;
/** The same at bits that a controller drives: this many times rarer, or it is noise. All common practice, no source. */
const RARER = 10;
const WIDTHS_KEPT = 4096;

interface Device {
  readonly text: string;
  readonly firstTick: number;
  readonly transaction: number;
  reads: number;
  notches: number;
  readonly widths: number[];
  zeroPairs: number;
}

export const suspectedCollision: Rule = {
  meta: { kind: "suspected-collision", clause: "UM10204 Rev 7 3.1.8, wired-AND; inference, common practice, no source" },
  watch: (findings) => {
    const devices = new Map<number, Device>();
    let driven = 0;
    let drivenBits = 0;
    return {
      transaction(row) {
        const all = row.moments.filter((moment) => moment.kind === "notch");
        const notches = isRead(row) ? all.filter((moment) => moment.count >= 9 * row.addressBytes) : [];
        driven += all.length - notches.length;
        drivenBits += 7 * (isRead(row) ? row.addressBytes : row.byteCount);
        if (!isRead(row)) return;
        let device = devices.get(row.address);
        if (device === undefined) {
          if (notches.length === 0) return;
          device = newDevice(row, notches[0].tick);
          devices.set(row.address, device);
        }
        device.zeroPairs += zeroPairs(row);
        if (notches.length > 0) device.reads++;
        device.notches += notches.length;
        for (const { width } of notches) if (device.widths.length < WIDTHS_KEPT) device.widths.push(width);
      },
      conclude(end) {
        for (const device of devices.values()) {
          const { reads, notches, zeroPairs: pairs, widths } = device;
          if (reads < READS || notches > ALWAYS * pairs) continue;
          if (driven * pairs * RARER > notches * drivenBits) continue;
          const sorted = widths.sort((a, b) => a - b);
          const median = sorted[sorted.length >> 1];
          const slack = Math.max(SPREAD * median, 2 * (end.head.sampleTicks ?? 0));
          if (sorted.filter((width) => Math.abs(width - median) <= slack).length < ALWAYS * sorted.length) continue;
          const apart = duration(seconds(median, findings.base));
          const text = `in ${reads} reads from ${device.text} SDA was let go for ${apart} between two zeros of a data byte, as when two targets answer ${apart} apart and differ; ${notches} of ${pairs} pairs of zeros show it`;
          findings.add("suspected-collision", device.firstTick, text, device.transaction);
        }
      },
    };
  },
};

function isRead(row: Row): boolean {
  return row.direction === READ && row.kind === KIND.normal;
}

function newDevice(row: Row, firstTick: number): Device {
  return { text: addressText(row), firstTick, transaction: row.index, reads: 0, notches: 0, widths: [], zeroPairs: 0 };
}

/** Neighbouring zeros in the data bytes of a read. */
function zeroPairs(row: Row): number {
  let sum = 0;
  for (let n = row.addressBytes; n < row.byteCount; n++) {
    if (row.bytes.bits[row.at + n] !== 8) continue;
    const value = row.bytes.value[row.at + n];
    for (let pair = ~(value | (value >> 1)) & 0x7f; pair !== 0; pair &= pair - 1) sum++;
  }
  return sum;
}
