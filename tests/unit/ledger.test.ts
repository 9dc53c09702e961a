// What the ledger keeps of every bit, against the bit itself: any block lengths, any mixture of restless and quiet lows.

import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { BIT, START } from "../../lib/engine/bits/bits";
import { newBitBlock } from "../../lib/engine/bits/columns";
import { Ledger, VALUE } from "../../lib/forensics/ledger";

interface Pulse {
  readonly low: number;
  readonly high: number;
  readonly value: 0 | 1;
  /** SDA changes after the SCL fall, in order. */
  readonly moves: readonly number[];
}

const pulse: fc.Arbitrary<Pulse> = fc
  .record({
    low: fc.integer({ min: 10, max: 5_000_000 }),
    high: fc.integer({ min: 10, max: 5_000_000 }),
    value: fc.constantFrom(0, 1),
    shares: fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 3 }),
  })
  .map(({ low, high, value, shares }) => ({
    low,
    high,
    value: value as 0 | 1,
    moves: shares.map((share) => Math.round(share * low)).sort((a, b) => a - b),
  }));

/** One transaction of these pulses, pushed in blocks of `length`. */
function ledgerOf(pulses: readonly Pulse[], length: number): Ledger {
  const ledger = new Ledger(false);
  const block = newBitBlock(false);
  let at = 1000;
  const put = (kind: number, value: number, fall: number, rise: number, end: number, moves: readonly number[]) => {
    const n = block.length;
    block.kind[n] = kind;
    block.value[n] = value;
    block.flags[n] = 0;
    block.tick[n] = kind === START ? at : rise;
    block.fall[n] = fall;
    block.rise[n] = rise;
    block.end[n] = end;
    block.sdaFirst[n] = moves.length === 0 ? Number.NaN : fall + moves[0];
    block.sdaLast[n] = moves.length === 0 ? Number.NaN : fall + moves[moves.length - 1];
    block.length = n + 1;
    if (block.length < length) return;
    ledger.push(block);
    block.length = 0;
  };
  put(START, 0, Number.NaN, Number.NaN, at + 500, []);
  at += 500;
  for (const { low, high, value, moves } of pulses) {
    put(BIT, value, at, at + low, at + low + high, moves);
    at += low + high;
  }
  ledger.push(block);
  ledger.finish();
  return ledger;
}

describe("the ledger", () => {
  test("tells how often SDA moved in each low, and when", () => {
    fc.assert(
      fc.property(fc.array(pulse, { minLength: 1, maxLength: 600 }), fc.integer({ min: 1, max: 100 }), (pulses, length) => {
        const ledger = ledgerOf(pulses, length);
        expect(ledger.pulses(0)).toBe(pulses.length);
        pulses.forEach(({ low, high, value, moves }, i) => {
          const entry = ledger.openEntry[0] + 1 + i;
          const last = moves[moves.length - 1];
          expect([ledger.low[entry], ledger.high[entry]]).toEqual([low, high]);
          expect((ledger.what[entry] & VALUE) !== 0).toBe(value === 1);
          expect(ledger.first[entry]).toBe(moves.length === 0 ? Number.NaN : moves[0]);
          expect(ledger.movedOnce(entry)).toBe(moves.length > 0 && moves[0] === last);
          expect(ledger.lastMove(entry)).toBe(moves.length > 0 && moves[0] !== last ? last : Number.NaN);
        });
      }),
      { numRuns: 30 },
    );
  });
});
