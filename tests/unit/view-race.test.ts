import { describe, expect, it } from "vitest";
import type { Contest, Summary } from "@/lib/diagnosis/report";
import { meet } from "@/lib/forensics/intent";
import { readTyped } from "@/lib/forensics/typed-message";
import { bracesOf, byName, drawnSlots, isNinth, laneLevels, lanePath, raceOf, slotText } from "@/lib/view/race";
import {
  blindSentences,
  clockBits,
  numbered,
  prefixWords,
  raceSentences,
  releasedWords,
  settlings,
  whatIfWords,
} from "@/lib/view/race-words";
import { edgesOf, message, readEdges } from "./view-support";

/** The write to the feed log that kept the bus, and the retry of the one that yielded at bit 20. */
const kept = message([
  [0xa0, 1],
  [0x01, 1],
  [0x1f, 1],
]);
const retry = message([
  [0xa0, 1],
  [0x01, 1],
  [0x3c, 1],
]);
const { ledger } = readEdges([edgesOf(`${kept.scl}${retry.scl}####`, `${kept.sda}${retry.sda}####`)], 1e6);

const contest: Contest = {
  transaction: 0,
  start_s: 0,
  decided_s: 0,
  byte: 2,
  bit: 2,
  bit_index: 20,
  kept: "C1",
  yielded: "C2",
  retry: 1,
  probability: 0.97,
  grade: "strong",
  evidence: [{ kind: "retry", bits: 6.2, detail: "" }],
  look_alikes: [],
};

function summary(contests: Contest[], step: number | null = null): Summary {
  return {
    contests,
    controllers: [
      { id: "C1", name: "pump controller", tlow_s: 5.2e-6, thigh_s: 4e-6, vol_v: null, transactions: 9 },
      { id: "C2", name: "gateway", tlow_s: 5.0e-6, thigh_s: 4e-6, vol_v: null, transactions: 9 },
    ],
    capture: { levels: "digital", sample_interval_s: step },
  } as unknown as Summary;
}

function theRace(contests = [contest]) {
  const race = raceOf(ledger, summary(contests), 0);
  if (race === null) throw new Error("no race");
  return race;
}

const plain = (text: string) => text.replaceAll("\u00a0", " ");

describe("a bit race from the ledger", () => {
  const race = theRace();

  it("knows what both wanted: the one from the bus, the other from its retry", () => {
    expect(race.kept.slice(18, 28)).toEqual([0, 0, 0, 1, 1, 1, 1, 1, "T", "P"]);
    expect(race.leavers[0].yielding).toMatchObject({ at: 20, fromRetry: true });
    expect(race.leavers[0].yielding.intent.slice(18, 26)).toEqual([0, 0, 1, 1, 1, 1, 0, 0]);
    expect(race.leavers[0].name).toBe("gateway");
  });

  it("lays the retry under it, equal up to the deciding bit", () => {
    const { retry, yielding } = race.leavers[0];
    expect(retry?.slice(0, yielding.at)).toEqual(race.bus.slice(0, yielding.at));
    expect([race.bus[yielding.at], retry?.[yielding.at]]).toEqual([0, 1]);
    expect(theRace([{ ...contest, retry: null }]).leavers[0].retry).toBeNull();
  });

  it("calls controllers by their names in sentences of the report", () => {
    const rows = [
      { id: "C1", name: "pump" },
      { id: "C12", name: null },
    ].map((row) => ({ ...row, tlow_s: null, thigh_s: null, vol_v: null, transactions: 1 }));
    expect(byName({ controllers: rows }, "C1 holds 4.6 us, C12 4.2 us, C2 none")).toBe("pump holds 4.6 us, C12 4.2 us, C2 none");
  });

  it("says what the lines could not show, by name", () => {
    const summaryOf = summary([contest]);
    expect(blindSentences({ ...summaryOf, blind_pairs: [] })).toEqual([]);
    const [sentence] = blindSentences({ ...summaryOf, blind_pairs: [{ kept: "C1", yielded: "C2" }] });
    expect(sentence).toMatch(/^Had gateway yielded to pump/);
  });

  it("says it in words", () => {
    expect(raceSentences(race)).toBe(
      "Both controllers send the same twenty bits: address 0x50, write, acknowledged, byte 01, acknowledged, two data bits. The first bit that differs is a 0 against a 1.",
    );
    expect(releasedWords(race.leavers[0], race)).toBe("released; wanted 1 1 1 0 0, as its retry shows");
  });

  it("without a retry says that the rest is not known", () => {
    const alone = theRace([{ ...contest, retry: null }]);
    expect(releasedWords(alone.leavers[0], alone)).toBe("released; what it wanted after that is not known");
    expect(raceSentences(alone)).toContain("a 0 against a 1");
  });

  it("orders several that yielded, and names each", () => {
    const three = theRace([contest, { ...contest, bit_index: 5, bit: 5, byte: 0, yielded: null, retry: null }]);
    expect(three.leavers.map((leaver) => leaver.yielding.at)).toEqual([5, 20]);
    expect(raceSentences(three)).toBe(
      "All three controllers send the same five bits: five address bits. The first bit that differs is a 0 against a 1. Gateway goes on to bit 20: a 0 against a 1.",
    );
  });

  it("is none for a transaction without a contest", () => {
    expect(raceOf(ledger, summary([contest]), 1)).toBeNull();
  });

  it("draws START to STOP with a brace over each byte", () => {
    expect(drawnSlots(race)).toEqual({ from: 0, to: 28 });
    expect(bracesOf(race)).toEqual([
      { from: 0, to: 8, text: "A0" },
      { from: 9, to: 17, text: "01" },
      { from: 18, to: 26, text: "1F" },
    ]);
    expect([8, 17, 26].every((slot) => isNinth(race, slot))).toBe(true);
    expect(slotText("T", 0, true)).toBe("A");
    expect(slotText("T", 1, true)).toBe("N");
    expect(slotText(null, 1, false)).toBe("·");
  });
});

describe("a lane", () => {
  it("rises and falls where its bits change, and is broken where nobody knows", () => {
    const frame = { left: 0, width: 10, high: 0, low: 20 };
    expect(lanePath([1, 0, 0, "P"], frame)).toBe("M0 0H10V20H20H30H35V0H40");
    expect(lanePath([1, null, 1], frame)).toBe("M0 0H10M20 0H30");
  });

  it("shows the target's answer where it leaves SDA alone, and nothing once it has let go", () => {
    expect(laneLevels([1, "T", 0, 1], [1, 0, 0, 0], 2)).toEqual([1, 0, 0, null]);
  });
});

describe("words", () => {
  it("count up to twenty in letters", () => {
    expect(numbered(1, "bit")).toBe("one bit");
    expect(numbered(20, "bit")).toBe("twenty bits");
    expect(numbered(21, "bit")).toBe("21 bits");
  });

  it("spell a prefix across a repeated START", () => {
    const byte = (value: number) => ({ value, bits: 8, ack: true });
    const parts = [
      { bytes: [byte(0xa0), byte(0x01)], closes: "Sr" as const },
      { bytes: [byte(0xa1), byte(0x20)], closes: "P" as const },
    ];
    expect(prefixWords(parts, 18 + 1 + 9 + 3)).toEqual([
      "address 0x50",
      "write",
      "acknowledged",
      "byte 01",
      "acknowledged",
      "repeated START",
      "address 0x50",
      "read",
      "acknowledged",
      "three bits of a byte read",
    ]);
  });

  it.each([
    ["0x50 W 01 0C", "it would have kept the bus from bit 21: it sends 0 where the bus had 1"],
    ["0x50 W 01 3C", "it contradicts the bus at bit 20: it sends 1, the bus stays 0, and it yields"],
    ["0x50 W 01 1F", "it ties: the same to the end, and neither would have noticed the other"],
    ["0x50 W 01", "at bit 18 it is a STOP against a data bit: UM10204 3.1.8 gives no outcome for that pair"],
    ["0x50 W ...", "not decided by what is known: equal up to bit 9"],
  ])("of what if %s", (text, words) => {
    const typed = readTyped(text);
    if (!typed.ok) throw new Error(typed.problem.message);
    expect(whatIfWords(meet(typed.value.intent, theRace().kept), typed.value.intent)).toBe(words);
  });
});

describe("what would settle a contest", () => {
  it("is nothing where a tap showed it", () => {
    expect(settlings({ ...contest, grade: "certain" }, summary([contest]))).toEqual([]);
  });

  it("names the sample interval that tells the two clocks apart, and what it would add", () => {
    const list = settlings(contest, summary([contest], 500e-9));
    const clock = list.find((entry) => entry.text.startsWith("Sample"));
    expect(plain(clock?.text ?? "")).toContain(
      "every 50.0 ns: the SCL lows of the two differ by 200 ns, and a sample here is 500 ns",
    );
    // 21 lows, (200/500)² · 6 / 2 / ln 2 each.
    expect(clock?.bits).toBeCloseTo(20 - (21 * 0.16 * 3) / Math.LN2, 6);
    expect(clockBits(1, 1, 1)).toBeCloseTo(3 / Math.LN2, 12);
  });

  it("asks for volts, a longer record and the log only where they are missing", () => {
    const texts = (one: Contest) => settlings(one, summary([one])).map((entry) => entry.text.split(/[ ,:]/)[0]);
    expect(texts(contest)).toEqual(["Record", "Record", "Attach"]);
    expect(texts({ ...contest, retry: null, evidence: [{ kind: "log", bits: 3, detail: "" }] })).toEqual([
      "Record",
      "Record",
      "Record",
    ]);
  });
});
