import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { parseBytes, race, whatIf } from "@/lib/forensics/race";

describe("bit race", () => {
  test("two writes to one address part in the data: the one with 0 keeps the bus", () => {
    const result = race([
      { label: "pump", bytes: [0x40, 0x02] },
      { label: "gateway", bytes: [0x40, 0x06] },
    ]);
    expect(result.kept).toEqual([0]);
    expect(result.decidedAt).toBe(9 + 5);
    expect(result.lanes[1].yieldsAt).toBe(14);
    expect(result.bus.slice(0, 8)).toEqual([0, 1, 0, 0, 0, 0, 0, 0]);
    expect(result.bus[8]).toBeNull();
  });

  test("UM10204 3.1.8: the numerically lowest stream wins among any number of equal length", () => {
    fc.assert(
      fc.property(
        fc.array(fc.array(fc.integer({ min: 0, max: 255 }), { minLength: 3, maxLength: 3 }), { minLength: 2, maxLength: 5 }),
        (list) => {
          // Writes only, so that every bit but the acknowledges is the controllers' own.
          const messages = list.map((bytes, i) => ({ label: String(i), bytes: [bytes[0] & 0xfe, bytes[1], bytes[2]] }));
          const key = (m: { bytes: number[] }) => m.bytes[0] * 65536 + m.bytes[1] * 256 + m.bytes[2];
          const least = Math.min(...messages.map(key));
          const winners = messages.flatMap((m, i) => (key(m) === least ? [i] : []));
          expect(race(messages).kept).toEqual(winners);
        },
      ),
    );
  });

  test("write before read at one address, and the longer read before the shorter (ACK before NACK)", () => {
    expect(
      race([
        { label: "r", bytes: [0x91, 0] },
        { label: "w", bytes: [0x90, 0] },
      ]),
    ).toMatchObject({ kept: [1], decidedAt: 7 });
    expect(
      race([
        { label: "one", bytes: [0x91, 0] },
        { label: "two", bytes: [0x91, 0, 0] },
      ]),
    ).toMatchObject({ kept: [1], decidedAt: 17 });
  });

  test("STOP against data: a 1 loses to it, against a 0 it is the pair that UM10204 3.1.8 leaves undefined", () => {
    const short = { label: "short", bytes: [0x90, 0x01] };
    expect(race([short, { label: "long", bytes: [0x90, 0x01, 0x80] }])).toMatchObject({ kept: [0], decidedAt: 18 });
    const against = race([short, { label: "long", bytes: [0x90, 0x01, 0x00] }]);
    expect(against.kept).toEqual([1]);
    expect(against.lanes[0].undefinedStop).toBe(true);
  });

  test("what if: where a message contradicts the bus, and who would have kept it", () => {
    expect(whatIf({ label: "bus", bytes: [0x90, 0x10] }, { label: "mine", bytes: [0x90, 0x11] })).toMatchObject({
      outcome: "yields",
      at: { pulse: 16, byte: 1, bit: 7 },
    });
    expect(whatIf({ label: "bus", bytes: [0x90, 0x10] }, { label: "mine", bytes: [0x80, 0x10] })).toMatchObject({
      outcome: "wins",
      at: { pulse: 3 },
    });
    expect(whatIf({ label: "bus", bytes: [0x90] }, { label: "mine", bytes: [0x90] })).toMatchObject({
      outcome: "same",
      at: null,
    });
  });

  test("bytes as people type them", () => {
    expect(parseBytes("90 02 ff")).toEqual([0x90, 0x02, 0xff]);
    expect(parseBytes("0x90,0x2")).toEqual([0x90, 0x02]);
    expect(parseBytes("90 1g")).toBeNull();
    expect(parseBytes("  ")).toBeNull();
  });
});
