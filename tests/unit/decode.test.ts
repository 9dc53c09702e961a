// The decoder against UM10204 Rev 7 and against a second decoder written from it (tests/support/naive.ts).

import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { FLAG } from "@/lib/engine/bus/transactions";
import { decodeBlocks } from "../support/decoded";
import { naiveDecode } from "../support/naive";
import { cut, draw, type Instant, toBlock } from "../support/wave";

/** Builds the waveform of a message: "S", "Sr", "P", or bits as "1"/"0"; four ticks a bit, sixteen a tick apart. */
function wire(words: readonly string[]): Instant[] {
  let scl = "##";
  let sda = "##";
  for (const word of words) {
    if (word === "S") [scl, sda] = [`${scl}##_`, `${sda}#__`];
    else if (word === "Sr") [scl, sda] = [`${scl}_##_`, `${sda}##__`];
    else if (word === "P") [scl, sda] = [`${scl}_##`, `${sda}__#`];
    else for (const b of word) [scl, sda] = [`${scl}_##_`, `${sda}${b === "1" ? "####" : "____"}`];
  }
  return draw(scl, sda);
}

const byte = (value: number, ack = 0) => value.toString(2).padStart(8, "0") + String(ack);
const decode = (instants: Instant[]) => decodeBlocks([toBlock(instants)], instants[instants.length - 1].tick + 1);

describe("frames as UM10204 Rev 7 draws them", () => {
  it("reads a write of one byte (Fig 11)", () => {
    const { transactions } = decode(wire(["S", byte(0xa0), byte(0x5c), "P"]));
    expect(transactions).toHaveLength(1);
    expect(transactions[0]).toMatchObject({
      opens: "S",
      closes: "P",
      kind: "normal",
      address: 0x50,
      addressBits: 7,
      direction: "W",
      addressAck: true,
    });
    expect(transactions[0].bytes.map((b) => b.value)).toEqual([0xa0, 0x5c]);
  });

  it("reads a combined format with a repeated START (Fig 13)", () => {
    const { transactions } = decode(wire(["S", byte(0x90), byte(0x01), "Sr", byte(0x91), byte(0x3c, 1), "P"]));
    expect(transactions.map((t) => [t.opens, t.closes, t.direction])).toEqual([
      ["S", "Sr", "W"],
      ["Sr", "P", "R"],
    ]);
    expect(transactions[1].bytes[1]).toEqual({ value: 0x3c, bits: 8, ack: false });
  });

  it("carries a 10-bit address into the read after Sr (3.1.11, Fig 15)", () => {
    const { transactions } = decode(wire(["S", byte(0xf4), byte(0x5a), "Sr", byte(0xf5), byte(0x11, 1), "P"]));
    expect(transactions.map((t) => [t.address, t.addressBits, t.direction, t.addressBytes])).toEqual([
      [0x25a, 10, "W", 2],
      [0x25a, 10, "R", 1],
    ]);
  });

  it("does not invent the rest of a 10-bit address", () => {
    const read = decode(wire(["S", byte(0xf5), byte(0x11, 1), "P"])).transactions[0];
    expect([read.address, read.addressBits, read.direction]).toEqual([null, 10, "R"]);
    const other = decode(wire(["S", byte(0xf4), byte(0x5a), "Sr", byte(0xf7), "P"])).transactions[1];
    expect(other.address).toBeNull();
  });

  it.each([
    [0x00, 0, "general-call"],
    [0x01, 1, "start-byte"],
    [0x02, 1, "reserved"],
    [0x04, 1, "reserved"],
    [0x07, 1, "reserved"],
    [0x08, 1, "hs-controller-code"],
    [0x0f, 1, "hs-controller-code"],
    [0x10, 0, "normal"],
    [0xee, 0, "normal"],
    [0xf8, 0, "device-id"],
    [0xf9, 0, "device-id"],
    [0xfa, 1, "reserved"],
    [0xfe, 1, "reserved"],
  ])("names first byte 0x%s by Table 4 of Rev 7", (first, ack, kind) => {
    expect(decode(wire(["S", byte(first, ack), "P"])).transactions[0].kind).toBe(kind);
  });

  it("stays in Hs-mode from the controller code to STOP (5.3.2)", () => {
    const { transactions } = decode(wire(["S", byte(0x0a, 1), "Sr", byte(0xa0), "Sr", byte(0xa1), "P", "S", byte(0xa0), "P"]));
    expect(transactions.map((t) => (t.flags & FLAG.hs) !== 0)).toEqual([false, true, true, false]);
  });
});

describe("broken traffic", () => {
  it("keeps the bits of a byte that a STOP cut short", () => {
    const [t] = decode(wire(["S", byte(0xa0), "10110", "P"])).transactions;
    expect(t.bytes[1]).toEqual({ value: 0b10110, bits: 5, ack: null });
    expect(t.flags & FLAG.misplacedStop).not.toBe(0);
  });

  it("says seven address bits are an address, and six are not", () => {
    const seven = decode(wire(["S", "1010000", "Sr", byte(0xa0), "P"])).transactions[0];
    expect([seven.address, seven.direction, seven.kind]).toEqual([0x50, null, "broken"]);
    const six = decode(wire(["S", "101000", "P"])).transactions[0];
    expect([six.address, six.addressBits, six.addressAck]).toEqual([null, 0, null]);
  });

  it("marks START followed by STOP as void (3.1.10 note 5)", () => {
    const [t] = decode(wire(["S", "P"])).transactions;
    expect([t.kind, t.flags & FLAG.voidMessage, t.bytes.length]).toEqual(["broken", FLAG.voidMessage, 0]);
  });

  it("shows a record that begins and ends inside a transaction", () => {
    const all = wire(["S", byte(0xa0), byte(0x12), "P", "S", byte(0xa0), byte(0x34), "P"]);
    const from = all.findIndex((i) => i.tick > 30 && i.scl === 0);
    const { transactions, remnants } = decode(all.slice(from, all.length - 30));
    expect(remnants).toHaveLength(1);
    expect(remnants[0]).toMatchObject({ closes: "P" });
    expect(transactions).toHaveLength(1);
    expect(transactions[0].closes).toBe("none");
    expect(transactions[0].flags & FLAG.endsInRecord).not.toBe(0);
  });

  it("decodes nothing through an unknown", () => {
    const all = wire(["S", byte(0xa0), byte(0x12), "P"]);
    const holed = all.map((i) => (i.tick === all[20].tick ? { ...i, sda: 2 as const } : i));
    const { transactions } = decode(holed);
    expect(transactions[0].closes).toBe("none");
    expect(transactions[0].bytes).toHaveLength(1);
  });
});

describe("changes in one tick", () => {
  it("takes SDA moving with the SCL fall as data, not as START or STOP", () => {
    //                    S  1 0 1 0 0 0 0 0 A
    const scl = `###${"_#".repeat(9)}_##`;
    const sda = `##_${"##__##__________".padEnd(18, "_")}__#`;
    const { transactions } = decode(draw(scl, sda));
    expect(transactions).toHaveLength(1);
    expect(transactions[0].bytes).toEqual([{ value: 0xa0, bits: 8, ack: true }]);
    expect(transactions[0].flags & FLAG.misplacedStop).toBe(0);
  });

  it("takes SDA moving with the SCL rise as the new bit, and says so", () => {
    const { transactions } = decode(draw("###_#_#_##", "##__#____#"));
    expect(transactions[0].bytes[0]).toEqual({ value: 0b10, bits: 2, ack: null });
    expect(transactions[0].flags & FLAG.setupWithinSample).not.toBe(0);
  });
});

describe("spikes (UM10204 Rev 7 Table 10: tSP 50 ns)", () => {
  const head = { timebase: { ticksPerSecond: 1e9, origin: "file" }, levels: "digital", sampleTicks: null } as const;
  function withPulse(width: number) {
    const wave = wire(["S", byte(0xa0), "P"]).map((i) => ({ ...i, tick: i.tick * 500 }));
    const at = wave.findIndex((i, k) => k > 8 && i.scl === 1 && i.sda === 1);
    const spike = [
      { ...wave[at], tick: wave[at].tick + 200, sda: 0 as const },
      { ...wave[at], tick: wave[at].tick + 200 + width },
    ];
    return [...wave.slice(0, at + 1), ...spike, ...wave.slice(at + 1)];
  }
  it.each([
    [49, 1, 1],
    [50, 0, 2],
    [51, 0, 2],
  ])("%i ns gives %i spikes and %i transactions", (width, spikes, transactions) => {
    const block = toBlock(withPulse(width));
    for (let at = 0; at < block.length; at++) {
      const found = decodeBlocks(cut(block, [at]), 1e6, head);
      expect([found.spikes.length, found.transactions.length]).toEqual([spikes, transactions]);
    }
  });
});

// Levels that wander at random reach every branch; SCL and SDA may move in one tick, and sometimes become unknown.
const level = fc.constantFrom<0 | 1>(0, 1);
const step = fc.record({
  gap: fc.integer({ min: 1, max: 3 }),
  clock: fc.integer({ min: 0, max: 3 }),
  data: fc.integer({ min: 0, max: 2 }),
  lost: fc.integer({ min: 0, max: 120 }),
});
const wandering = fc.tuple(level, level, fc.array(step, { minLength: 2, maxLength: 400 })).map(([firstScl, firstSda, steps]) => {
  const out: Instant[] = [{ tick: 0, scl: firstScl, sda: firstSda }];
  let tick = 0;
  let scl = firstScl;
  let sda = firstSda;
  for (const { gap, clock, data, lost } of steps) {
    tick += gap;
    if (clock > 0) scl = scl === 1 ? 0 : 1;
    if (data === 0) sda = sda === 1 ? 0 : 1;
    const now: Instant = { tick, scl: lost === 1 ? 2 : scl, sda: lost === 0 ? 2 : sda };
    const last = out[out.length - 1];
    if (last.scl !== now.scl || last.sda !== now.sda) out.push(now);
  }
  return out;
});

describe("agreement with the second decoder", () => {
  it("on wandering lines, cut anywhere", () => {
    fc.assert(
      fc.property(wandering, fc.array(fc.nat(400), { maxLength: 6 }), (instants, at) => {
        const found = decodeBlocks(cut(toBlock(instants), at), instants[instants.length - 1].tick + 1);
        const mine = found.transactions.map(({ opens, closes, start, bytes }) => ({ opens, closes, start, bytes }));
        expect(mine).toEqual(naiveDecode(instants));
      }),
      { numRuns: 1500 },
    );
  });

  it("on lawful traffic", () => {
    const message = fc.record({
      address: fc.nat(127),
      read: fc.boolean(),
      data: fc.array(fc.nat(255), { maxLength: 5 }),
      nack: fc.boolean(),
      again: fc.boolean(),
    });
    fc.assert(
      fc.property(fc.array(message, { minLength: 1, maxLength: 8 }), (messages) => {
        const words = messages.flatMap((m, i) => [
          i > 0 && messages[i - 1].again ? "Sr" : "S",
          byte(m.address * 2 + (m.read ? 1 : 0), m.nack ? 1 : 0),
          ...m.data.map((d) => byte(d)),
          ...(m.again && i < messages.length - 1 ? [] : ["P"]),
        ]);
        const { transactions } = decode(wire(words));
        expect(transactions.map((t) => t.bytes.map((b) => b.value))).toEqual(
          messages.map((m) => [m.address * 2 + (m.read ? 1 : 0), ...m.data]),
        );
      }),
    );
  });
});
