// In: transactions. Out: messages whose packet error code is wrong, on devices that show the habit of sending one. A CRC that
// fits is an accident once in 256 messages, and lengths are ambiguous (write byte with PEC = write word), so only agreement over
// many messages settles it; a bus without the habit is never blamed.

import { CLOSE, KIND } from "../../engine/bus/address";
import { crc8 } from "../../limits/pec";
import { hex } from "../format";
import type { Row, Rule } from "../rule";

/** Messages with a right PEC that make a habit, and their least share of all messages of that shape. */
const HABIT = 3;
const HABIT_SHARE = 0.5;
/** A whole device: more messages, and nearly all of them. */
const DEVICE_HABIT = 4;
const DEVICE_SHARE = 0.8;
/** Address, command and PEC at least. */
const SHORTEST = 3;
const SHAPES_KEPT = 8192;
const WRONG_KEPT = 256;

interface Tally {
  right: number;
  wrong: number;
  readonly shape: string;
  readonly device: number;
  readonly mismatches: { transaction: number; tick: number; sent: number; due: number }[];
}

export const pecMismatch: Rule = {
  meta: { kind: "pec-mismatch", clause: "SMBus PEC, CRC-8 x^8+x^2+x+1 (Linux smbus-protocol.rst, RM0440)" },
  watch: (findings) => {
    const shapes = new Map<string, Tally>();
    const devices = new Map<number, { right: number; wrong: number }>();
    const message = new Message();
    return {
      transaction(row) {
        message.extend(row);
        if (row.closes !== CLOSE.stop || !message.checkable) return;
        const device = message.device;
        const shape = `${device}.${message.command}.${message.directions}.${message.length}`;
        const tally = shapes.get(shape) ?? { right: 0, wrong: 0, shape, device, mismatches: [] };
        if (shapes.size < SHAPES_KEPT) shapes.set(shape, tally);
        const whole = devices.get(device) ?? { right: 0, wrong: 0 };
        devices.set(device, whole);
        if (message.residue === 0) {
          tally.right++;
          whole.right++;
          return;
        }
        tally.wrong++;
        whole.wrong++;
        if (tally.mismatches.length < WRONG_KEPT) {
          tally.mismatches.push({
            transaction: row.index,
            tick: row.bytes.startTick[row.at + row.byteCount - 1],
            sent: message.last,
            due: message.due,
          });
        }
      },
      conclude() {
        for (const tally of shapes.values()) {
          const whole = devices.get(tally.device) ?? tally;
          const habit = tally.right >= HABIT && tally.right >= HABIT_SHARE * (tally.right + tally.wrong);
          const ofDevice = whole.right >= DEVICE_HABIT && whole.right >= DEVICE_SHARE * (whole.right + whole.wrong);
          // Several messages of one shape and none with a right PEC: this shape carries none.
          const without = tally.right === 0 && tally.wrong > 1;
          if (!habit && (!ofDevice || without)) continue;
          for (const { transaction, tick, sent, due } of tally.mismatches) {
            findings.add("pec-mismatch", tick, `PEC ${hex(sent)} sent, ${hex(due)} due`, transaction);
          }
        }
      },
    };
  },
};

/** The bytes from START to STOP, as the PEC runs over them: every byte, address bytes included. */
class Message {
  residue = 0;
  /** The PEC that was due in place of the last byte. */
  due = 0;
  last = 0;
  length = 0;
  device = 0;
  command = 0;
  directions = "";
  checkable = false;
  private whole = false;

  extend(row: Row): void {
    if (row.opens === 0) this.begin();
    const { bytes, at, byteCount } = row;
    if (row.kind !== KIND.normal || row.addressBits !== 7 || row.addressAck !== 1) this.whole = false;
    if (this.length > 0 && row.address !== this.device) this.whole = false;
    this.device = row.address;
    this.directions += row.direction;
    for (let i = at; i < at + byteCount; i++) {
      if (bytes.bits[i] !== 8 || bytes.ack[i] > 1) this.whole = false;
      this.due = this.residue;
      this.last = bytes.value[i];
      this.residue = crc8(this.residue, this.last);
      if (this.length === 1 && this.directions === "0") this.command = this.last;
      this.length++;
    }
    this.checkable = this.whole && this.length >= SHORTEST && byteCount > 1;
  }

  private begin(): void {
    this.residue = 0;
    this.length = 0;
    this.directions = "";
    this.whole = true;
    this.command = 0;
  }
}
