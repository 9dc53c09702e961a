import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  busOf,
  intentOf,
  type MessagePart,
  meet,
  pairings,
  placeOf,
  type Slot,
  whatIf,
  wiredAnd,
  yielding,
} from "@/lib/forensics/intent";
import { readTyped } from "@/lib/forensics/typed-message";

/** Bytes all acknowledged, to a STOP. */
function write(...values: number[]): MessagePart[] {
  return [{ bytes: values.map((value) => ({ value, bits: 8, ack: true })), closes: "P" }];
}

function typed(text: string): readonly Slot[] {
  const read = readTyped(text);
  if (!read.ok) throw new Error(read.problem.message);
  return read.value.intent;
}

const refusal = (text: string) => {
  const read = readTyped(text);
  return read.ok ? null : read.problem.message;
};

describe("intended bits", () => {
  it("leave the ninth bit of a write to the target, and the data of a read, but not its acknowledge (UM10204 Rev 7 3.1.6)", () => {
    expect(intentOf(write(0xa0))).toEqual([1, 0, 1, 0, 0, 0, 0, 0, "T", "P"]);
    const read: MessagePart = {
      bytes: [
        { value: 0x91, bits: 8, ack: true },
        { value: 0x1b, bits: 8, ack: false },
      ],
      closes: "P",
    };
    expect(intentOf([read]).slice(8)).toEqual([..."TTTTTTTTT", 1, "P"]);
    expect(busOf([read]).slice(8)).toEqual([0, 0, 0, 0, 1, 1, 0, 1, 1, 1, "P"]);
  });

  it("stop being known where a byte breaks off", () => {
    expect(intentOf([{ bytes: [{ value: 0b101, bits: 3, ack: null }], closes: "none" }])).toEqual([1, 0, 1, null]);
  });

  it("are placed by pulses since the START that opened their part", () => {
    const slots = typed("0x50 W 01 Sr 0x50 R 1");
    expect(slots[18]).toBe("Sr");
    expect(placeOf(slots, 17)).toEqual({ part: 0, byte: 1, bit: 8, pulse: 17 });
    expect(placeOf(slots, 19 + 9)).toEqual({ part: 1, byte: 1, bit: 0, pulse: 9 });
  });
});

describe("two messages", () => {
  it("part at the first bit where one sends HIGH and the line is LOW (3.1.8)", () => {
    expect(meet(typed("0x50 W 01 3C"), typed("0x50 W 01 1F"))).toEqual({ outcome: "yields", at: 20 });
    expect(meet(typed("0x50 W 01 1F"), typed("0x50 W 01 3C"))).toEqual({ outcome: "keeps", at: 20 });
  });

  it("at one address: the write keeps the bus from the read, at the R/W bit", () => {
    expect(meet(typed("0x48 W 00"), typed("0x48 R 1"))).toEqual({ outcome: "keeps", at: 7 });
  });

  it("of one read each: the longer keeps the bus, because ACK is LOW and NACK HIGH", () => {
    expect(meet(typed("0x48 R 2"), typed("0x48 R 1"))).toEqual({ outcome: "keeps", at: 17 });
  });

  it("that are equal both finish without anybody noticing (3.1.8)", () => {
    expect(meet(typed("0x50 W 01 3C"), typed("A0 01 3C")).outcome).toBe("tie");
    expect(meet(typed("0x50 W 01 Sr 0x50 R 3"), typed("0x50 W 01 Sr 0x50 R 3")).outcome).toBe("tie");
  });

  it.each([
    ["0x50 W 01 Sr 0x50 R 1", "0x50 W 01 3C", "sr-data"],
    ["0x50 W 01", "0x50 W 01 3C", "stop-data"],
    ["0x50 W 01 Sr 0x50 R 1", "0x50 W 01", "sr-stop"],
  ])("%s against %s is a pair that 3.1.8 leaves undefined", (one, other, pair) => {
    expect(meet(typed(one), typed(other))).toEqual({ outcome: "undefined", at: 18, pair });
    expect(meet(typed(other), typed(one))).toEqual({ outcome: "undefined", at: 18, pair });
  });

  it("are not decided beyond what is known of one", () => {
    expect(meet(typed("0x50 W ..."), typed("0x50 W 01"))).toEqual({ outcome: "open", at: 9 });
    expect(meet(typed("0x48 R"), typed("0x48 R 4"))).toEqual({ outcome: "open", at: 17 });
  });

  it("of equal make-up: the numerically lowest stream always keeps the bus (3.1.8), whatever is sent", () => {
    const bytes = fc.array(fc.integer({ min: 0, max: 255 }), { minLength: 1, maxLength: 4 });
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 127 }), fc.integer({ min: 0, max: 127 }), bytes, bytes, (a, b, one, other) => {
        const length = Math.min(one.length, other.length);
        const [mine, theirs] = [
          [a << 1, ...one.slice(0, length)],
          [b << 1, ...other.slice(0, length)],
        ];
        const number = (values: readonly number[]) => values.reduce((sum, value) => sum * 256 + value, 0);
        const { outcome } = meet(intentOf(write(...mine)), intentOf(write(...theirs)));
        const order = Math.sign(number(mine) - number(theirs));
        expect(outcome).toBe(order < 0 ? "keeps" : order > 0 ? "yields" : "tie");
      }),
    );
  });

  it("in a list: each against each", () => {
    const list = ["0x20 W ...", "0x48 W ...", "0x48 R"].map((name) => ({ name, intent: typed(name) }));
    expect(pairings(list).map(({ a, b, meeting }) => [a, b, meeting.outcome, meeting.at])).toEqual([
      [0, 1, "keeps", 0],
      [0, 2, "keeps", 0],
      [1, 2, "keeps", 7],
    ]);
  });
});

describe("wired AND", () => {
  it("is low if anybody pulls low, and of equal conditions the condition", () => {
    expect(wiredAnd([0, 1])).toBe(0);
    expect(wiredAnd([1, 1])).toBe(1);
    expect(wiredAnd(["T", "T"], 0)).toBe(0);
    expect(wiredAnd(["P", "P"])).toBe("P");
    expect(wiredAnd(["Sr", "P"])).toBeNull();
    expect(wiredAnd([null, 1])).toBeNull();
    expect(wiredAnd([null, 0])).toBe(0);
  });

  it("of the one that kept the bus and the one that yielded is what stood on the bus", () => {
    const parts = write(0xa0, 0x01, 0x1f);
    const lost = yielding(intentOf(parts), 20, write(0xa0, 0x01, 0x3c));
    const bus = busOf(parts);
    expect(lost.fromRetry).toBe(true);
    const shown = intentOf(parts).map((slot, s) => wiredAnd(s > lost.at ? [slot] : [slot, lost.intent[s]], bus[s]));
    expect(shown).toEqual(bus.map((slot) => slot));
  });
});

describe("the one that yielded", () => {
  const kept = intentOf(write(0xa0, 0x01, 0x1f));

  it("wanted what its retry shows, where that has the same beginning", () => {
    const lost = yielding(kept, 20, write(0xa0, 0x01, 0x3c));
    expect(lost.intent.slice(18, 27)).toEqual([0, 0, 1, 1, 1, 1, 0, 0, "T"]);
  });

  it.each([
    ["no retry", null],
    ["a retry that parts earlier", write(0xa0, 0x02, 0x3c)],
    ["a retry that sends a 0 there", write(0xa0, 0x01, 0x1f)],
  ])("with %s: a 1 at the deciding bit and nothing known after it", (_, retry) => {
    const lost = yielding(kept, 20, retry);
    expect(lost.fromRetry).toBe(false);
    expect(lost.intent.slice(0, 20)).toEqual(kept.slice(0, 20));
    expect(lost.intent.slice(20)).toEqual([1, null, null, null, null, null, null, null]);
    expect(lost.intent).toHaveLength(kept.length);
  });
});

describe("what if", () => {
  const parts = write(0xa0, 0x01, 0x1f);
  const race = { kept: intentOf(parts), bus: busOf(parts) };
  const ask = (text: string) => whatIf(race.kept, race.bus, typed(text));

  it("it contradicts the bus: the bus stays as it was", () => {
    const answer = ask("0x50 W 01 3C");
    expect(answer.meeting).toEqual({ outcome: "yields", at: 20 });
    expect(answer.bus).toEqual(race.bus);
  });

  it("it has a 0 where the bus had a 1: from there on the bus would have shown it, and targets are not known to answer", () => {
    const answer = ask("0x50 W 01 0C");
    expect(answer.meeting).toEqual({ outcome: "keeps", at: 21 });
    expect(answer.bus.slice(18)).toEqual([0, 0, 0, 0, 1, 1, 0, 0, null, "P"]);
    expect(answer.bus[8]).toBe(0);
  });

  it("it is the same: a tie", () => {
    expect(ask("A0 01 1F").meeting.outcome).toBe("tie");
  });

  it("both meet a NACK: both end there", () => {
    const refused: MessagePart[] = [{ bytes: [{ value: 0x7a, bits: 8, ack: false }], closes: "P" }];
    const answer = whatIf(intentOf(refused), busOf(refused), typed("0x3D W 01 02"));
    expect(answer.meeting).toEqual({ outcome: "tie", at: 9 });
  });
});

describe("a typed message", () => {
  it("is the same in every notation", () => {
    expect(typed("0x50 W 01 3C")).toEqual(typed("A0 01 3C"));
    expect(typed("50 w 1,3c")).toEqual(typed("S A0 01 3C P"));
    expect(typed("0x48 R 2")).toEqual(typed("91 00 00"));
  });

  it("of a 10-bit address has its two address bytes, and for a read Sr with the first again (3.1.11)", () => {
    expect(typed("0x250 W 07")).toEqual(typed("F4 50 07"));
    expect(typed("0x250 R 1")).toEqual(typed("F4 50 Sr F5 00"));
  });

  it.each([
    ["", "There is no message yet."],
    ["0xA0 W 01", "0xA0 is above 0x7F. Is it the address byte of 0x50? Then write 0x50 W."],
    ["0x50 01", "After the address 0x50 stands neither W nor R."],
    ["0x50 W 1G", '"1G" is no byte in hexadecimal.'],
    ["0x48 R 1B 40", "After R only the number of bytes read is written: their values are the target's own."],
    ["0x48 R 0", '"0" is no number of bytes to read.'],
    ["0x500 W", "0x500 is above 0x3FF, the last 10-bit address."],
    ["W 01", '"W" needs an address before it.'],
    ["0x50 W 01 Sr", "Nothing follows the Sr, or nothing stands before it."],
    ["0x48 R Sr 0x50 W", "A read in the middle needs to say how many bytes it reads, such as R 2."],
  ])("%j is refused: %s", (text, message) => {
    expect(refusal(text)).toBe(message);
  });
});
