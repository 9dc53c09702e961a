// In: bits. Out: transactions and their bytes. Broken traffic is kept as far as it goes: a byte that broke off stands last
// with the bits it had, and flags say what cut it short. UM10204 3.1.10 notes 4 and 5: a START resets every device's bus
// logic even when badly placed; START followed at once by STOP is a void message.

import { BIT, type BitBlock, IN_HS, LOST, OUTSIDE, REPEATED_START, SETUP_WITHIN_SAMPLE, START } from "../bits/bits";
import type { Remnant } from "../decoder";
import { addressOf, CLOSE, KIND, kindOf, opensTenBit, READ } from "./address";
import { ByteBuilder, TransactionBuilder } from "./builder";
import { ACK, type ByteBlock, FLAG, NACK, NO_ACK_BIT, NO_ADDRESS, type TransactionBlock } from "./transactions";

export interface AssemblyListener {
  transactions(block: TransactionBlock, bytes: ByteBlock): void;
  remnant(remnant: Remnant): void;
}

export interface Assembler {
  bits(block: BitBlock): void;
  /** Hands on the transactions that have ended. */
  flush(): void;
}

export function createAssembler(listener: AssemblyListener): Assembler {
  const transactions = new TransactionBuilder();
  const bytes = new ByteBuilder();
  // Times live in an object's fields: captured variables would box every double anew.
  const at = {
    startTick: Number.NaN,
    startEdge: Number.NaN,
    byteStart: Number.NaN,
    lastEnd: Number.NaN,
    firstByte: 0,
    remnantStart: Number.NaN,
  };
  let open = false;
  let opens = 0;
  let flags = 0;
  let byteCount = 0;
  let pulses = 0;
  let slot = 0;
  let shift = 0;
  // First two bytes whole: what the address is made of.
  let first = -1;
  let second = -1;
  let firstAck = NO_ACK_BIT;
  let secondAck = NO_ACK_BIT;
  // 10-bit address of the write before a repeated START; gone with STOP.
  let remembered = NO_ADDRESS;
  // Clocks before any START of this stretch of record.
  let remnantPulses = 0;
  let framed = false;

  function begin(kind: number, tick: number, edge: number, hs: boolean): void {
    open = true;
    opens = kind === START ? 0 : 1;
    at.startTick = tick;
    at.startEdge = edge;
    flags = hs ? FLAG.hs : 0;
    at.firstByte = bytes.next;
    byteCount = 0;
    pulses = 0;
    slot = 0;
    shift = 0;
    first = -1;
    second = -1;
    at.lastEnd = tick;
  }

  function bit(value: number, tick: number, end: number, bitFlags: number): void {
    pulses++;
    if ((bitFlags & SETUP_WITHIN_SAMPLE) !== 0) flags |= FLAG.setupWithinSample;
    if (slot === 0) at.byteStart = tick;
    at.lastEnd = Number.isNaN(end) ? tick : end;
    if (slot < 8) {
      shift = (shift << 1) | value;
      slot++;
      return;
    }
    const ack = value === 0 ? ACK : NACK;
    if (byteCount === 0) {
      first = shift;
      firstAck = ack;
    } else if (byteCount === 1) {
      second = shift;
      secondAck = ack;
    }
    bytes.push(shift, ack, 8, at.byteStart, at.lastEnd);
    byteCount++;
    slot = 0;
    shift = 0;
  }

  function close(closes: number, tick: number, edge: number): void {
    const tenBitWrite = first >= 0 && opensTenBit(first) && (first & 1) === 0;
    const brokenFirst = byteCount === 0 && slot > 0;
    const addressed = addressOf(
      brokenFirst ? shift : first,
      first >= 0 ? 8 : brokenFirst ? slot : 0,
      tenBitWrite ? second : -1,
      remembered,
    );
    const addressBytes = first < 0 ? 0 : tenBitWrite && second >= 0 ? 2 : 1;
    const addressBroke = first < 0 || (tenBitWrite && second < 0 && slot > 0);
    if (slot > 0) {
      bytes.push(shift, NO_ACK_BIT, slot, at.byteStart, at.lastEnd);
      byteCount++;
      flags |= FLAG.shortByte;
      if (closes === CLOSE.stop) flags |= FLAG.misplacedStop;
      if (closes === CLOSE.repeated) flags |= FLAG.misplacedStart;
    }
    if (pulses === 0 && closes !== CLOSE.none) flags |= FLAG.voidMessage;
    if (closes === CLOSE.none) flags |= FLAG.endsInRecord;
    transactions.push({
      startTick: at.startTick,
      endTick: closes === CLOSE.none ? at.lastEnd : tick,
      startEdge: at.startEdge,
      endEdge: edge,
      opens,
      closes,
      kind: addressBroke ? KIND.broken : clears(closes) ? KIND.busClear : kindOf(first),
      addressBytes,
      address: addressed.address,
      addressBits: addressed.bits,
      direction: addressed.direction,
      addressAck: addressBytes === 2 ? secondAck : addressBytes === 1 && !(tenBitWrite && addressBroke) ? firstAck : NO_ACK_BIT,
      flags,
      firstByte: at.firstByte,
      byteCount,
      pulses,
    });
    const tenBitRead = addressed.bits === 10 && addressed.direction === READ;
    if (closes !== CLOSE.repeated) remembered = NO_ADDRESS;
    else if (addressed.bits === 10 && addressed.address !== NO_ADDRESS) remembered = addressed.address;
    else if (!tenBitRead) remembered = NO_ADDRESS;
    open = false;
  }

  // Nine clocks with SDA released and nothing else: how a controller frees a held line when it begins with a START.
  function clears(closes: number): boolean {
    return byteCount === 1 && first === 0xff && firstAck === NACK && closes !== CLOSE.none && slot === 0;
  }

  function endRemnant(tick: number, closes: Remnant["closes"]): void {
    if (!framed && remnantPulses > 0)
      listener.remnant({ startTick: at.remnantStart, endTick: tick, pulses: remnantPulses, closes });
    framed = closes !== "none";
    remnantPulses = 0;
    at.remnantStart = Number.NaN;
  }

  function bits(block: BitBlock): void {
    const { kind, value, flags: bitFlags, tick, end, edge, length } = block;
    for (let i = 0; i < length; i++) {
      const k = kind[i];
      if (k === BIT) {
        if ((bitFlags[i] & OUTSIDE) === 0) bit(value[i], tick[i], end[i], bitFlags[i]);
        else if (!framed) {
          if (remnantPulses === 0) at.remnantStart = tick[i];
          remnantPulses++;
        }
        continue;
      }
      if (k === LOST) {
        if (open) close(CLOSE.none, tick[i], edge[i]);
        endRemnant(tick[i], "none");
        continue;
      }
      if (k === START || k === REPEATED_START) {
        if (open) close(CLOSE.repeated, tick[i], edge[i]);
        endRemnant(tick[i], "Sr");
        begin(k, tick[i], edge[i], (bitFlags[i] & IN_HS) !== 0);
        continue;
      }
      if (open) close(CLOSE.stop, tick[i], edge[i]);
      remembered = NO_ADDRESS;
      endRemnant(tick[i], "P");
    }
  }

  function flush(): void {
    if (transactions.waiting === 0) return;
    const upTo = open ? at.firstByte : bytes.next;
    listener.transactions(transactions.take(), bytes.take(upTo));
  }

  return { bits, flush };
}
