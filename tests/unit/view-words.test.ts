import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Summary } from "@/lib/diagnosis/report";
import { addressSearch, bytePattern, EVERYTHING, filtered } from "@/lib/view/filter";
import {
  address,
  addressBytes,
  beside,
  count,
  duration,
  evidenceBits,
  groupedSeconds,
  instant,
  probability,
  timeDigits,
  volts,
} from "@/lib/view/format";
import { transactionAt, transactionNear, transactionsIn } from "@/lib/view/hit";
import { Ledger } from "@/lib/view/ledger";
import { marksOf, neighbour } from "@/lib/view/marks";
import { OPENING, readState, type ViewState, writeState } from "@/lib/view/state";
import { edgesOf, message, readEdges } from "./view-support";

const plain = (text: string) => text.replaceAll("\u00a0", " ");

describe("writing numbers", () => {
  it.each([
    [1.4820614, 7, "1.482 061 4"],
    [-0.002, 6, "−0.002 000"],
    [1234.5, 1, "1 234.5"],
    [0, 0, "0"],
  ])("groups %d with %d decimals as %s", (value, digits, text) => {
    expect(plain(groupedSeconds(value, digits))).toBe(text);
  });

  it.each([
    [43.4e-6, "43.4 µs"],
    [250e-9, "250 ns"],
    [2, "2.00 s"],
    [9.996e-6, "10.0 µs"],
    [999.96e-9, "1.00 µs"],
    [0.0349, "34.9 ms"],
    [-5e-9, "−5.00 ns"],
    [3600, "3 600 s"],
    [0, "0 s"],
  ])("writes %d s as %s", (seconds, text) => {
    expect(plain(duration(seconds))).toBe(text);
  });

  it("never rounds a broken limit onto its limit", () => {
    expect(plain(beside(4.699999e-6, 4.7e-6))).toBe("4.699999 µs");
    expect(plain(beside(4.7e-6, 4.7e-6))).toBe("4.70 µs");
    expect(plain(beside(4.2e-6, 4.7e-6))).toBe("4.20 µs");
  });

  it("never rounds a likely contest to certainty", () => {
    expect(probability(0.9999)).toBe("> 0.99");
    expect(probability(1)).toBe("1.00");
    expect(probability(0.974)).toBe("0.97");
    expect(probability(0.001)).toBe("< 0.01");
  });

  it("gives both forms of a 7-bit address and one of a 10-bit address", () => {
    expect([address(0x50, 7), addressBytes(0x50, 7)]).toEqual(["0x50", "A0/A1"]);
    expect([address(0x250, 10), addressBytes(0x250, 10)]).toEqual(["0x250", ""]);
    expect(address(-1, 0)).toBe("–");
  });

  it("writes counts, volts and bits of evidence", () => {
    expect([count(999), count(1604), count(2_000_000)].map(plain)).toEqual(["999", "1 604", "2 000 000"]);
    expect([volts(-0.05), volts(Number.NaN)].map(plain)).toEqual(["−0.05 V", "–"]);
    expect([evidenceBits(6.24), evidenceBits(-5)]).toEqual(["+6.2", "−5.0"]);
  });

  it("shows as many decimals as the sampling carries, and sample numbers where no time is known", () => {
    const base = { ticksPerSecond: 1e12, origin: "file" } as const;
    expect(timeDigits(base, 1e5)).toBe(7);
    expect(timeDigits(base, null)).toBe(9);
    expect(plain(instant(12345, { ticksPerSecond: 1, origin: "assumed" }, 0))).toBe("#12 345");
  });
});

describe("searches", () => {
  it.each([
    ["01 1f", [1, 0x1f]],
    ["0x01,0x1F", [1, 0x1f]],
    ["A0..3C", [0xa0, null, 0x3c]],
    ["a0 ?? 3c", [0xa0, null, 0x3c]],
  ])("reads %s as bytes", (text, bytes) => {
    expect(bytePattern(text)).toEqual(bytes);
  });

  it.each(["", "1", "0g", "..", "hello", "01 2"])("refuses %j as bytes", (text) => {
    expect(bytePattern(text)).toBeNull();
  });

  it.each([
    ["0x50", { address: 0x50, direction: null }],
    ["50", { address: 0x50, direction: null }],
    ["A1", { address: 0x50, direction: "R" }],
    ["0xA0", { address: 0x50, direction: "W" }],
    ["250", { address: 0x250, direction: null }],
  ])("reads %s as an address", (text, found) => {
    expect(addressSearch(text)).toEqual(found);
  });

  it.each(["400", "xyz", "", "0x5000"])("refuses %j as an address", (text) => {
    expect(addressSearch(text)).toBeNull();
  });
});

/** Three transactions: write A0 01 1F, read A1 3C, write 7A that nobody answers. */
function three() {
  const parts = [
    message([
      [0xa0, 1],
      [0x01, 1],
      [0x1f, 1],
    ]),
    message([
      [0xa1, 1],
      [0x3c, 0],
    ]),
    message([[0x7a, 0]]),
  ];
  const scl = parts.map((part) => part.scl).join("");
  const sda = parts.map((part) => part.sda).join("");
  return readEdges([edgesOf(scl, sda)], scl.length * 10);
}

describe("the ledger", () => {
  const { ledger } = three();
  const input = { ledger, marks: marksOf(null), tagged: [2] };
  const kept = (change: Partial<typeof EVERYTHING>) => [...(filtered(input, { ...EVERYTHING, ...change }) ?? [0, 1, 2])];

  it("keeps what a filter asks for", () => {
    expect(filtered(input, EVERYTHING)).toBeNull();
    expect(kept({ address: 0x50 })).toEqual([0, 1]);
    expect(kept({ direction: "W" })).toEqual([0, 2]);
    expect(kept({ nack: true })).toEqual([1, 2]);
    expect(kept({ bytes: "01 1F" })).toEqual([0]);
    expect(kept({ bytes: "01 .." })).toEqual([0]);
    expect(kept({ bytes: "1F A1" })).toEqual([]);
    expect(kept({ show: "tagged" })).toEqual([2]);
    expect(kept({ show: "tagged", direction: "R" })).toEqual([]);
    expect(kept({ show: "contested" })).toEqual([]);
  });

  it("counts the addresses seen", () => {
    expect(ledger.addresses).toEqual([
      { address: 0x3d, bits: 7, count: 1 },
      { address: 0x50, bits: 7, count: 2 },
    ]);
  });

  it("knows its longest transaction", () => {
    const lengths = [0, 1, 2].map((index) => ledger.endTick(index) - ledger.startTick(index));
    expect(ledger.longest).toBe(Math.max(...lengths));
    expect(new Ledger().longest).toBe(0);
  });

  it("finds the transaction at an instant, or the nearest", () => {
    const inside = (ledger.startTick(1) + ledger.endTick(1)) / 2;
    const between = ledger.endTick(0) + 1;
    expect(transactionAt(ledger, inside)).toBe(1);
    expect(transactionAt(ledger, between)).toBeNull();
    expect(transactionNear(ledger, between)).toBe(0);
    expect(transactionNear(ledger, -1e9)).toBe(0);
    expect(transactionNear(ledger, 1e12)).toBe(2);
    expect(transactionsIn(ledger, between, 1e12)).toEqual({ first: 1, end: 3 });
  });
});

describe("marks", () => {
  const summary = {
    contests: [{ transaction: 7, retry: 8 }],
    stretches: [],
    faults: [
      { kind: "address-nack", transaction: 3, time_s: 0, detail: "" },
      { kind: "spike", transaction: 4, time_s: 0, detail: "" },
      { kind: "bus-clear", transaction: null, time_s: 0, detail: "" },
    ],
    violations: [{ transaction: 1, parameter: "tBUF", side: "min" }],
    measurements: [{ below: 5, above: 0 }],
    capture: { time_base: "file" },
  } as unknown as Summary;
  const marks = marksOf(summary);

  it("knows the retry of a contest and parts remarks from faults", () => {
    expect(marks.of(8).retryOf).toBe(7);
    expect(marks.faulty).toEqual([1, 3]);
    expect(marks.of(4).faults).toHaveLength(1);
    expect(marks.unanswered).toEqual([3]);
  });

  it("does not call a row within limits while violations were left off the list", () => {
    expect(marks.complete).toBe(false);
  });

  it("walks to the neighbours in an ascending list", () => {
    fc.assert(
      fc.property(fc.uniqueArray(fc.nat(50)), fc.integer({ min: -2, max: 52 }), (values, from) => {
        const list = [...values].sort((a, b) => a - b);
        expect(neighbour(list, from, 1)).toBe(list.find((value) => value > from) ?? null);
        expect(neighbour(list, from, -1)).toBe(list.findLast((value) => value < from) ?? null);
      }),
    );
  });
});

describe("the view in the address", () => {
  it("comes back as it was written", () => {
    const state = fc.record<ViewState>({
      reading: fc.constantFrom("stack", "strip", "limits", "faults"),
      filter: fc.record({
        show: fc.constantFrom("all", "contested", "tagged", "outside-limits"),
        address: fc.option(fc.integer({ min: 0, max: 0x3ff })),
        direction: fc.constantFrom("R", "W", null),
        nack: fc.boolean(),
        bytes: fc.constantFrom("", "01 1F", "A0 ..", "zz"),
      }),
      selected: fc.option(fc.nat(2_000_000)),
      strip: fc.option(fc.integer().map((from) => ({ from, to: from + 100 }))),
      stackScale: fc.option(fc.integer({ min: 1, max: 9999 }).map((value) => value / 100)),
    });
    fc.assert(
      fc.property(state, (made) => {
        const query = new URLSearchParams(writeState(made));
        expect(readState((name) => query.get(name))).toEqual(made);
      }),
    );
  });

  it("writes nothing for the opening view and falls back where an entry is damaged", () => {
    expect(writeState(OPENING)).toEqual([]);
    const query = new URLSearchParams("reading=paint&show=&address=9999&transaction=-4&strip=5..1&scale=nan&bytes=01");
    expect(readState((name) => query.get(name))).toEqual({ ...OPENING, filter: { ...EVERYTHING, bytes: "01" } });
  });
});
