// In: bits. Out: transactions and their bytes. Broken traffic is kept as far as it goes: a byte that broke off stands last
// with the bits it had, and flags say what cut it short. UM10204 3.1.10 notes 4 and 5: a START resets every device's bus
// logic even when badly placed; START followed at once by STOP is a void message.

import { BIT, type BitBlock, IN_HS, LOST, OUTSIDE, REPEATED_START, SETUP_WITHIN_SAMPLE, START } from "../bits/bits";
import type { Remnant } from "../decoder";
import { addressOf, CLOSE, KIND, kindOf, opensTenBit, READ } from "./address";
import { ByteBuilder, TransactionBuilder } from "./builder";
import { ACK, type ByteBlock, FLAG, NACK, NO_ACK_BIT, NO_ADDRESS, type TransactionBlock } from "./transactions";

/** Slot of the acknowledge; the data bits before it are 0 to 7. */
const ACK_SLOT = 8;
const SLOTS = 9;

export interface AssemblyListener {
  transactions(block: TransactionBlock, bytes: ByteBlock): void;
  remnant(remnant: Remnant): void;
}

export class Assembler {
  private readonly transactions = new TransactionBuilder();
  private readonly bytes = new ByteBuilder();
  private startTick = Number.NaN;
  private startEdge = Number.NaN;
  private byteStart = Number.NaN;
  private lastEnd = Number.NaN;
  private firstByte = 0;
  private open = false;
  private opens = 0;
  private flags = 0;
  private byteCount = 0;
  private pulses = 0;
  private slot = 0;
  private shift = 0;
  /** First two bytes whole: what the address is made of. */
  private first = -1;
  private second = -1;
  private firstAck = NO_ACK_BIT;
  private secondAck = NO_ACK_BIT;
  /** 10-bit address of the write before a repeated START; gone with STOP. */
  private remembered = NO_ADDRESS;
  /** Clocks before any START of this stretch of record. */
  private remnantStart = Number.NaN;
  private remnantPulses = 0;
  private framed = false;

  constructor(private readonly listener: AssemblyListener) {}

  bits(block: BitBlock): void {
    const { kind, flags, tick, edge, length } = block;
    for (let i = 0; i < length; i++) {
      const k = kind[i];
      if (k === BIT) {
        if ((flags[i] & OUTSIDE) !== 0) this.outside(tick[i]);
        else i = this.inside(block, i) - 1;
      } else if (k === LOST) {
        if (this.open) this.close(CLOSE.none, tick[i], edge[i]);
        this.endRemnant(tick[i], "none");
      } else if (k === START || k === REPEATED_START) {
        if (this.open) this.close(CLOSE.repeated, tick[i], edge[i]);
        this.endRemnant(tick[i], "Sr");
        this.begin(k, tick[i], edge[i], (flags[i] & IN_HS) !== 0);
      } else {
        if (this.open) this.close(CLOSE.stop, tick[i], edge[i]);
        this.remembered = NO_ADDRESS;
        this.endRemnant(tick[i], "P");
      }
    }
  }

  /** Hands on the transactions that have ended. */
  flush(): void {
    if (this.transactions.waiting === 0) return;
    const upTo = this.open ? this.firstByte : this.bytes.next;
    this.listener.transactions(this.transactions.take(), this.bytes.take(upTo));
  }

  private begin(kind: number, tick: number, edge: number, hs: boolean): void {
    this.open = true;
    this.opens = kind === START ? 0 : 1;
    this.startTick = tick;
    this.startEdge = edge;
    this.flags = hs ? FLAG.hs : 0;
    this.firstByte = this.bytes.next;
    this.byteCount = 0;
    this.pulses = 0;
    this.slot = 0;
    this.shift = 0;
    this.first = -1;
    this.second = -1;
    this.lastEnd = tick;
  }

  // Bits of an open transaction, one at least. Returns the entry after them.
  private inside(block: BitBlock, from: number): number {
    const next = this.slot === 0 ? this.wholeBytes(block, from) : from;
    if (next > from) return next;
    this.bit(block, from);
    return from + 1;
  }

  // Bytes that lie whole in the block from entry `from` on, nine bits each. Returns the entry after the last of them.
  private wholeBytes(block: BitBlock, from: number): number {
    const { kind, value, flags, length, tick, end } = block;
    let seen = 0;
    let i = from;
    for (let next = i + SLOTS; next <= length; next += SLOTS) {
      let word = 0;
      let odd = 0;
      let marks = 0;
      for (let b = i; b < next; b++) {
        word = (word << 1) | value[b];
        odd |= kind[b] ^ BIT;
        marks |= flags[b];
      }
      if (odd !== 0 || (marks & OUTSIDE) !== 0) break;
      seen |= marks;
      this.endByte(word >> 1, word & 1, tick[i], endOf(tick, end, next - 1));
      i = next;
    }
    if (i === from) return i;
    if ((seen & SETUP_WITHIN_SAMPLE) !== 0) this.flags |= FLAG.setupWithinSample;
    this.pulses += i - from;
    this.lastEnd = endOf(tick, end, i - 1);
    return i;
  }

  // One bit of a byte that breaks off or lies in two blocks.
  private bit(block: BitBlock, i: number): void {
    const { value, flags, tick, end } = block;
    this.pulses++;
    if ((flags[i] & SETUP_WITHIN_SAMPLE) !== 0) this.flags |= FLAG.setupWithinSample;
    if (this.slot === 0) this.byteStart = tick[i];
    this.lastEnd = endOf(tick, end, i);
    if (this.slot < ACK_SLOT) {
      this.shift = (this.shift << 1) | value[i];
      this.slot++;
      return;
    }
    this.endByte(this.shift, value[i], this.byteStart, this.lastEnd);
    this.slot = 0;
    this.shift = 0;
  }

  private endByte(value: number, ackBit: number, startTick: number, endTick: number): void {
    const ack = ackBit === 0 ? ACK : NACK;
    if (this.byteCount === 0) {
      this.first = value;
      this.firstAck = ack;
    } else if (this.byteCount === 1) {
      this.second = value;
      this.secondAck = ack;
    }
    this.bytes.push(value, ack, ACK_SLOT, startTick, endTick);
    this.byteCount++;
  }

  private outside(tick: number): void {
    if (this.framed) return;
    if (this.remnantPulses === 0) this.remnantStart = tick;
    this.remnantPulses++;
  }

  private close(closes: number, tick: number, edge: number): void {
    const tenBitWrite = this.first >= 0 && opensTenBit(this.first) && (this.first & 1) === 0;
    const brokenFirst = this.byteCount === 0 && this.slot > 0;
    const addressed = addressOf(
      brokenFirst ? this.shift : this.first,
      this.first >= 0 ? 8 : brokenFirst ? this.slot : 0,
      tenBitWrite ? this.second : -1,
      this.remembered,
    );
    const addressBytes = this.first < 0 ? 0 : tenBitWrite && this.second >= 0 ? 2 : 1;
    const addressBroke = this.first < 0 || (tenBitWrite && this.second < 0 && this.slot > 0);
    if (this.slot > 0) {
      this.bytes.push(this.shift, NO_ACK_BIT, this.slot, this.byteStart, this.lastEnd);
      this.byteCount++;
      this.flags |= FLAG.shortByte;
      if (closes === CLOSE.stop) this.flags |= FLAG.misplacedStop;
      if (closes === CLOSE.repeated) this.flags |= FLAG.misplacedStart;
    }
    if (this.pulses === 0 && closes !== CLOSE.none) this.flags |= FLAG.voidMessage;
    if (closes === CLOSE.none) this.flags |= FLAG.endsInRecord;
    this.transactions.push({
      startTick: this.startTick,
      endTick: closes === CLOSE.none ? this.lastEnd : tick,
      startEdge: this.startEdge,
      endEdge: edge,
      opens: this.opens,
      closes,
      kind: addressBroke ? KIND.broken : this.clears(closes) ? KIND.busClear : kindOf(this.first),
      addressBytes,
      address: addressed.address,
      addressBits: addressed.bits,
      direction: addressed.direction,
      addressAck:
        addressBytes === 2 ? this.secondAck : addressBytes === 1 && !(tenBitWrite && addressBroke) ? this.firstAck : NO_ACK_BIT,
      flags: this.flags,
      firstByte: this.firstByte,
      byteCount: this.byteCount,
      pulses: this.pulses,
    });
    const tenBitRead = addressed.bits === 10 && addressed.direction === READ;
    if (closes !== CLOSE.repeated) this.remembered = NO_ADDRESS;
    else if (addressed.bits === 10 && addressed.address !== NO_ADDRESS) this.remembered = addressed.address;
    else if (!tenBitRead) this.remembered = NO_ADDRESS;
    this.open = false;
  }

  // Nine clocks with SDA released and nothing else: how a controller frees a held line when it begins with a START.
  private clears(closes: number): boolean {
    return this.byteCount === 1 && this.first === 0xff && this.firstAck === NACK && closes !== CLOSE.none && this.slot === 0;
  }

  private endRemnant(tick: number, closes: Remnant["closes"]): void {
    if (!this.framed && this.remnantPulses > 0)
      this.listener.remnant({ startTick: this.remnantStart, endTick: tick, pulses: this.remnantPulses, closes });
    this.framed = closes !== "none";
    this.remnantPulses = 0;
    this.remnantStart = Number.NaN;
  }
}

// Where the high of a bit ends; its rise where the record ended first.
function endOf(tick: Float64Array, end: Float64Array, i: number): number {
  return Number.isNaN(end[i]) ? tick[i] : end[i];
}
