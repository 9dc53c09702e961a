// In: transaction blocks with their bytes, and who drove each. Out: one transaction at a time as the report states it.

import { seconds, type Timebase } from "../base/time";
import {
  ACK,
  type ByteBlock,
  CLOSES,
  DIRECTIONS,
  KINDS,
  NO_ACK_BIT,
  NO_ADDRESS,
  OPENS,
  type TransactionBlock,
} from "../engine/bus/transactions";
import type { ControllerRow, Report } from "./report";

export type ReportTransaction = Report["transactions"][number];

/** Transactions kept as the columns they came in: about 80 bytes each and 19 per byte on the bus. */
export class TransactionStore {
  private readonly blocks: { transactions: TransactionBlock; bytes: ByteBlock }[] = [];

  add(transactions: TransactionBlock, bytes: ByteBlock): void {
    if (transactions.length > 0) this.blocks.push({ transactions, bytes });
  }

  *rows(base: Timebase, attribution: Int16Array, controllers: readonly ControllerRow[]): Generator<ReportTransaction> {
    for (const { transactions, bytes } of this.blocks) {
      for (let i = 0; i < transactions.length; i++) {
        const who = controllers[attribution[transactions.first + i] ?? -1];
        yield reportTransaction(transactions, bytes, i, base, who?.id ?? null);
      }
    }
  }
}

/** Entry `i` of a block. */
export function reportTransaction(
  block: TransactionBlock,
  bytes: ByteBlock,
  i: number,
  base: Timebase,
  controller: string | null,
): ReportTransaction {
  const from = block.firstByte[i] - bytes.first;
  const data = from + block.addressBytes[i];
  const to = from + block.byteCount[i];
  const bits = block.addressBits[i];
  return {
    index: block.first + i,
    start_s: seconds(block.startTick[i], base),
    end_s: seconds(block.endTick[i], base),
    opens: OPENS[block.opens[i]],
    closes: CLOSES[block.closes[i]],
    address_bytes: span(from, data).map((k) => ({ value: bytes.value[k], ack: bytes.ack[k] === ACK })),
    address: block.address[i] === NO_ADDRESS ? null : block.address[i],
    address_bits: bits === 7 || bits === 10 ? bits : null,
    direction: DIRECTIONS[block.direction[i]],
    kind: KINDS[block.kind[i]],
    address_ack: acknowledged(block.addressAck[i]),
    bytes: span(data, to).map((k) => ({
      value: bytes.value[k],
      ack: acknowledged(bytes.ack[k]),
      start_s: seconds(bytes.startTick[k], base),
      bits: bytes.bits[k],
    })),
    controller,
  };
}

function span(from: number, to: number): number[] {
  return Array.from({ length: to - from }, (_, k) => from + k);
}

function acknowledged(ack: number): boolean | null {
  return ack === NO_ACK_BIT ? null : ack === ACK;
}
