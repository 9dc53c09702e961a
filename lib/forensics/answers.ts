// In: transactions and their bytes. Out: contests between targets: several answer one read at once, each gives up at the first
// bit where it sends 1 and reads 0, and answers again at the next. SMBus alert response and ARP's Get UDID (SMBus 3.2, 6.5).
//
// The lines show the answer that stayed and nothing of the others, so this rests on order alone. Where two had raised their hands
// before the first of two successive answers, the lower comes first for certain; where the second raised its hand only later, either
// order is as likely. The share of the former is learned from this capture's own pairs, with nothing assumed of it beforehand.

import type { TargetContest } from "../diagnosis/report";
import { ACK, type ByteBlock, DIRECTIONS, type TransactionBlock } from "../engine/bus/transactions";
import { FLOOR, gradeOf } from "./grade";

const ALERT = 0x0c;
const ARP = 0x61;
/** Get UDID, general: every target that has no address of its own yet answers. */
const GET_UDID = 0x03;
const READ = DIRECTIONS.indexOf("R");
const BYTE = 9;

/** One read that every target with something to say answers. */
export interface Answer {
  readonly transaction: number;
  readonly of: "alert" | "arp";
  /** Empty where nobody answered: nobody has anything more to say. */
  readonly data: readonly number[];
  readonly startTick: number;
}

/** Collects answers while transactions are read. */
export class Answers {
  readonly list: Answer[] = [];
  #armed = -1;

  push(block: TransactionBlock, bytes: ByteBlock): void {
    for (let i = 0; i < block.length; i++) {
      const address = block.address[i];
      if (address === ALERT || address === ARP) this.#take(block, bytes, i);
    }
  }

  #take(block: TransactionBlock, bytes: ByteBlock, i: number): void {
    const transaction = block.first + i;
    const first = block.firstByte[i] - bytes.first + block.addressBytes[i];
    const last = block.firstByte[i] - bytes.first + block.byteCount[i];
    if (block.direction[i] !== READ) {
      if (block.address[i] === ARP && last > first && bytes.value[first] === GET_UDID) this.#armed = transaction;
      return;
    }
    const of = block.address[i] === ALERT ? "alert" : "arp";
    if (of === "arp" && this.#armed !== transaction - 1) return;
    const data: number[] = [];
    if (block.addressAck[i] === ACK) for (let b = first; b < last && bytes.bits[b] === 8; b++) data.push(bytes.value[b]);
    this.list.push({ transaction, of, data, startTick: block.startTick[i] });
  }
}

interface Pair {
  readonly answer: Answer;
  readonly next: Answer;
  /** First bit in which they differ, counted over their data from 0; ninth bits left out. */
  readonly bit: number;
  /** The first of the two has 0 there: as it must, where both answered it. */
  readonly ascending: boolean;
}

/** Successive answers of different targets, with nothing between them that says that nobody was left. */
function pairsOf(answers: readonly Answer[]): Pair[] {
  const pairs: Pair[] = [];
  const held = new Map<Answer["of"], Answer>();
  for (const next of answers) {
    const answer = held.get(next.of);
    held.set(next.of, next);
    if (answer === undefined || answer.data.length === 0 || next.data.length === 0) continue;
    const bit = firstDifference(answer.data, next.data);
    if (bit === null) continue;
    pairs.push({ answer, next, bit, ascending: ((answer.data[bit >> 3] >> (7 - (bit & 7))) & 1) === 0 });
  }
  return pairs;
}

function firstDifference(a: readonly number[], b: readonly number[]): number | null {
  for (let k = 0; k < Math.min(a.length, b.length); k++) {
    const differ = a[k] ^ b[k];
    if (differ !== 0) return k * 8 + Math.clz32(differ) - 24;
  }
  return null;
}

/** Steps of the share of pairs that met, from 0 to 1, each taken in its middle. */
const STEPS = 200;

/** Probability that the two of an ascending pair met, every share of meeting pairs being as likely as another beforehand. */
export function meetingProbability(ascending: number, descending: number): number {
  let met = 0;
  let all = 0;
  for (let step = 0; step < STEPS; step++) {
    const share = (step + 0.5) / STEPS;
    const rising = share + (1 - share) / 2;
    const others = (ascending - 1) * Math.log(rising) + descending * Math.log((1 - share) / 2);
    const weight = Math.exp(others - (ascending + descending - 1) * Math.log(0.5));
    met += weight * share;
    all += weight * rising;
  }
  return met / all;
}

/** Contests between targets, in order. Times in seconds. */
export function betweenTargets(answers: readonly Answer[], ticksPerSecond: number): TargetContest[] {
  const pairs = pairsOf(answers);
  const ascending = pairs.filter((pair) => pair.ascending).length;
  const probability = ascending === 0 ? 0 : meetingProbability(ascending, pairs.length - ascending);
  if (probability < FLOOR) return [];
  return pairs
    .filter((pair) => pair.ascending)
    .map(({ answer, next, bit }): TargetContest => {
      const alert = answer.of === "alert";
      const kept = alert ? answer.data[0] >> 1 : null;
      const yielded = alert ? next.data[0] >> 1 : null;
      return {
        transaction: answer.transaction,
        start_s: answer.startTick / ticksPerSecond,
        byte: 1 + (bit >> 3),
        bit: bit & 7,
        bit_index: BYTE * (1 + (bit >> 3)) + (bit & 7),
        kept,
        yielded,
        retry: next.transaction,
        probability,
        grade: gradeOf(probability, false),
        detail: `${alert ? "The alert response" : "The answer to Get UDID"} of the target that comes in transaction ${next.transaction} is equal up to here and then has 1 where this one has 0, as it would be if both answered this read. Rising order came ${ascending} of ${pairs.length} times; by chance it comes in half of them. Nothing else of the target that gave up is on the lines.`,
      };
    });
}
