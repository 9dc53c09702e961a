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
  readonly device: number;
  /** Of each wrong one, in a row: transaction, tick of the PEC, what was sent, what was due. */
  readonly mismatches: number[];
}

const ADDRESSES = 128;

export const pecMismatch: Rule = {
  meta: { kind: "pec-mismatch", clause: "SMBus PEC, CRC-8 x^8+x^2+x+1 (Linux smbus-protocol.rst, RM0440)" },
  watch: (findings) => {
    const shapes = new Map<number | string, Tally>();
    const right = new Uint32Array(ADDRESSES);
    const wrong = new Uint32Array(ADDRESSES);
    const message = new Message();
    return {
      transaction(row) {
        message.extend(row);
        if (row.closes !== CLOSE.stop || !message.checkable) return;
        const { device, shape } = message;
        const fits = message.residue === 0;
        if (fits) right[device]++;
        else wrong[device]++;
        let tally = shapes.get(shape);
        if (tally === undefined) {
          if (shapes.size === SHAPES_KEPT) return;
          tally = { right: 0, wrong: 0, device, mismatches: [] };
          shapes.set(shape, tally);
        }
        if (fits) tally.right++;
        else if (tally.wrong++ < WRONG_KEPT)
          tally.mismatches.push(row.index, row.bytes.startTick[row.at + row.byteCount - 1], message.last, message.due);
      },
      conclude() {
        for (const tally of shapes.values()) {
          const all = right[tally.device] + wrong[tally.device];
          const habit = tally.right >= HABIT && tally.right >= HABIT_SHARE * (tally.right + tally.wrong);
          const ofDevice = right[tally.device] >= DEVICE_HABIT && right[tally.device] >= DEVICE_SHARE * all;
          // Several messages of one shape and none with a right PEC: this shape carries none.
          const without = tally.right === 0 && tally.wrong > 1;
          if (!habit && (!ofDevice || without)) continue;
          for (let i = 0; i < tally.mismatches.length; i += 4) {
            const [transaction, tick, sent, due] = tally.mismatches.slice(i, i + 4);
            findings.add("pec-mismatch", tick, `PEC ${hex(sent)} sent, ${hex(due)} due`, transaction);
          }
        }
      },
    };
  },
};

/** Transactions and bytes of a message whose shape is a small number; few have more. */
const FEW_TRANSACTIONS = 4;
const FEW_BYTES = 1024;

/** The bytes from START to STOP, as the PEC runs over them: every byte, address bytes included. */
class Message {
  residue = 0;
  /** The PEC that was due in place of the last byte. */
  due = 0;
  last = 0;
  length = 0;
  device = 0;
  command = 0;
  /** Of its transactions, a bit each behind a leading 1, and as letters where there are many. */
  private directions = 1;
  private course = "";
  private transactions = 0;
  checkable = false;
  private whole = false;

  extend(row: Row): void {
    if (row.opens === 0) this.begin();
    const { bytes, at, byteCount } = row;
    if (row.kind !== KIND.normal || row.addressBits !== 7 || row.addressAck !== 1) this.whole = false;
    if (this.length > 0 && row.address !== this.device) this.whole = false;
    this.device = row.address;
    this.transactions++;
    if (this.transactions <= FEW_TRANSACTIONS) this.directions = 2 * this.directions + row.direction;
    else this.course += row.direction;
    for (let i = at; i < at + byteCount; i++) {
      if (bytes.bits[i] !== 8 || bytes.ack[i] > 1) this.whole = false;
      this.due = this.residue;
      this.last = bytes.value[i];
      this.residue = crc8(this.residue, this.last);
      if (this.length === 1 && this.transactions === 1 && row.direction === 0) this.command = this.last;
      this.length++;
    }
    this.checkable = this.whole && this.length >= SHORTEST && byteCount > 1;
  }

  /** The same for messages to the same device with the same command, directions and length. No string where a number will do. */
  get shape(): number | string {
    const { device, command, directions, length, course } = this;
    if (course === "" && length < FEW_BYTES) return ((device * 256 + command) * 32 + directions) * FEW_BYTES + length;
    return `${device}.${command}.${directions}.${course}.${length}`;
  }

  private begin(): void {
    this.residue = 0;
    this.length = 0;
    this.directions = 1;
    this.course = "";
    this.transactions = 0;
    this.whole = true;
    this.command = 0;
  }
}
