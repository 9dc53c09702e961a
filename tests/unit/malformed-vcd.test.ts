import { gzipSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import { inflated } from "@/lib/engine/bytes/gzip";
import { openVcd } from "@/lib/engine/samples/vcd";
import { host } from "@/workers/host";
import { HEADER, refusedVcd, sourceOf, vcdOf } from "../support/vcd";
import { changesOf, write } from "../support/vcd-bus";

const { changes, end } = changesOf(write(0x50, 1, 2, 3));
const GOOD = vcdOf(changes, end);
const START = '#0\n1!\n1"\n';
/** `text` in place of the first change after the header; it then stands on line 8. */
const broken = (text: string) => `${HEADER}#0\n${text}\n#10\n0"\n#20\n`;

describe("malformed VCDs are refused with what is wrong and where", () => {
  it.each([
    ["an empty file", "", "empty", "test.vcd is empty.", undefined],
    [
      "a header cut off",
      HEADER.slice(0, 60),
      "vcd-header",
      "ends inside its header, at byte 60: no $enddefinitions was found",
      3,
    ],
    [
      "text that is no VCD",
      "Time,SCL,SDA\n0,1,1\n",
      "vcd-header",
      '"Time,SCL,SDA" where a keyword such as $var or $scope is due',
      1,
    ],
    [
      "a $var without a name",
      HEADER.replace(" scl", ""),
      "vcd-var",
      "a $var of 3 words, where type, size, code and name are due",
      3,
    ],
    ["a $var without code and name", HEADER.replace(" ! scl", ""), "vcd-var", "a $var without an identifier code and a name", 3],
    ["a $var that ends at once", HEADER.replace("$var wire 1 ! scl $end", "$var wire 1 $end"), "vcd-var", "a $var", 3],
    ["a $var of no size", HEADER.replace("wire 1 !", "wire one !"), "vcd-var", 'a $var whose size is "one", not a number', 3],
    ["a negative size", HEADER.replace("wire 1 !", "wire -1 !"), "vcd-var", 'whose size is "-1"', 3],
    [
      "a $scope without a name",
      HEADER.replace("$scope module top", "$scope module"),
      "vcd-scope",
      "$scope with no name after it",
      2,
    ],
    [
      "a timescale without a unit",
      HEADER.replace("1 ns", "10"),
      "vcd-timescale",
      '$timescale "10", where 1, 10 or 100 and s, ms, us, ns, ps or fs are due',
      1,
    ],
    ["a timescale of an unknown unit", HEADER.replace("1 ns", "1 min"), "vcd-timescale", '$timescale "1min"', 1],
    ["an empty timescale", HEADER.replace("1 ns", ""), "vcd-timescale", '$timescale ""', 1],
    ["no variable at all", "$timescale 1 ns $end\n$enddefinitions $end\n#0\n", "no-channels", "declares no variable", 2],
    ["no value change", HEADER, "no-changes", "has a VCD header but no value change after it", undefined],
    ["a time with letters", broken("1!\n#1a"), "vcd-time", '"#1a" where a time, # and a whole number, is due', 9],
    ["a negative time", broken("1!\n#-5"), "vcd-time", '"#-5" where a time', 9],
    ["a time with a fraction", broken("#1.5"), "vcd-time", '"#1.5" where a time', 8],
    ["a # alone", broken("#"), "vcd-time", '"#" where a time', 8],
    ["a value apart from its code", broken("1 !"), "vcd-change", "the value 1 with no identifier code directly after it", 8],
    [
      "a word that is nothing",
      broken("1!\n%oops"),
      "vcd-change",
      '"%oops", which is neither a time, a value change nor a keyword',
      9,
    ],
    ["a value that is none", broken("3!"), "vcd-change", '"3!", which is neither', 8],
    ["a vector with a wrong digit", broken("b2 !"), "vcd-change", 'a vector with the digit "2"', 8],
    ["a vector without digits", broken("b !"), "vcd-change", "a vector with the digit", 8],
    [
      "bytes of another kind of file",
      `${HEADER}${START}\u0001\u0002\ufffd\u0003`.concat("\u0080 \n#5\n"),
      "vcd-change",
      "which is neither",
      10,
    ],
  ])("%s", async (_, text, code, message, line) => {
    const problem = await refusedVcd(text);
    expect(problem.code).toBe(code);
    expect(problem.message).toContain(message);
    expect(problem.advice).not.toBe("");
    if (line !== undefined) {
      expect(problem.place.line).toBe(line);
      expect(problem.message).toContain(`test.vcd, line ${line}:`);
      expect(problem.place.byte).toBeTypeOf("number");
    }
  });

  it("damage far behind the part that is surveyed", async () => {
    const far = GOOD + Array.from({ length: 40_000 }, (_, i) => `#${end + 10 + i * 10}\n${i % 2}!\n`).join("");
    const problem = await refusedVcd(`${far}@@@\n#99999999\n`);
    expect(problem.code).toBe("vcd-change");
    expect(problem.place).toEqual({ byte: far.length, line: far.split("\n").length });
    expect(problem.message).toContain(`line ${far.split("\n").length}`);
  });

  it("a file without any white space", async () => {
    expect(await refusedVcd("$".repeat(200_000))).toMatchObject({ code: "not-vcd", place: { line: 1 } });
  });

  it.each([
    ["an unknown channel", { scl: "clock" }, "unknown-channel", 'no channel "clock" in this file; it has top.scl, top.sda'],
    [
      "an unknown tap",
      { taps: [{ label: "M1", scl: null, sda: "m1.sda", polarity: "drive" }] as const },
      "unknown-channel",
      '"m1.sda"',
    ],
    ["one channel twice", { scl: "scl", sda: "top.scl" }, "same-channel", "both given as top.scl"],
  ])("%s", async (_, choices, code, message) => {
    const problem = await refusedVcd(GOOD, choices);
    expect(problem.code).toBe(code);
    expect(problem.message).toContain(message);
  });

  it("a vector given without its bit: the bits are listed", async () => {
    const text = GOOD.replace("wire 1 ! scl", "wire 2 ! lines [1:0]");
    const problem = await refusedVcd(text, { scl: "lines" });
    expect(problem).toMatchObject({ code: "ambiguous-channel" });
    expect(problem.message).toContain("top.lines[1], top.lines[0]");
  });

  it("a string as a bus line", async () => {
    expect(await refusedVcd(GOOD.replace("wire 1 ! scl", "string 1 ! scl"), { scl: "scl" })).toMatchObject({
      code: "unusable-channel",
    });
  });

  it.each([
    ["a single line", GOOD.replace('$var wire 1 " sda $end', ""), "one-channel"],
    ["lines that never move", vcdOf([], 5000), "no-activity"],
    [
      "one line that moves",
      vcdOf(
        changes.filter((change) => change.line === "sda"),
        end,
      )
        .replace("scl", "a")
        .replace("sda", "b"),
      "no-clock",
    ],
  ])("%s is no bus", async (_, text, code) => {
    expect(await refusedVcd(text)).toMatchObject({ code });
  });

  it("compressed data that is cut off or corrupt", async () => {
    const whole = gzipSync(GOOD);
    const cut = inflated(sourceOf(whole.subarray(0, whole.length - 12)), host);
    const opened = await openVcd(cut, {}, true);
    expect(opened).toMatchObject({ ok: false, problem: { code: "gzip-broken" } });
    const good = await openVcd(inflated(sourceOf(whole, [77]), host), {}, true);
    expect(good).toMatchObject({ ok: true, value: { head: { gzip: true } } });
  });
});
