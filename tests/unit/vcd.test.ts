import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { CUT, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "@/lib/engine/samples/edges";
import { openVcd } from "@/lib/engine/samples/vcd";
import { HEADER, readVcd, sourceOf, vcdOf } from "../support/vcd";
import { changesOf, type Said, write } from "../support/vcd-bus";

// Grammar and keywords: IEEE 1364-2005 clause 18. What simulators add was seen in their own output.

const TALK = [...write(0x50, 0x01, 0x7e), ...write(0x48, 0xff, 0x35)];
const SAID = "S A0 A 01 A 7E A P S 90 A FF A 35 A P";
const { changes, end } = changesOf(TALK);
const PLAIN = vcdOf(changes, end);
const header = (...variables: string[]) =>
  ["$timescale 1 ns $end", "$scope module top $end", ...variables, "$upscope $end", "$enddefinitions $end", ""].join("\n");
const spelt = (codes: { scl: string; sda: string }) => (line: "scl" | "sda", level: 0 | 1) => `${level}${codes[line]}`;

describe("reading a VCD", () => {
  it("reads levels, times and the time base", async () => {
    const out = await readVcd(PLAIN);
    expect(out.said).toBe(SAID);
    expect(out.head).toMatchObject({
      format: "vcd",
      levels: "digital",
      startTick: 0,
      sampleTicks: null,
      timebase: { ticksPerSecond: 1e9, origin: "file" },
      proposal: { scl: "top.scl", sda: "top.sda", basis: "names" },
    });
    expect(out.edges[0]).toEqual({ tick: 0, lines: SCL | SDA });
    expect(out.edges.length).toBe(changes.length + 1);
    expect(out.tail).toMatchObject({
      endTick: end,
      samples: changes.length + 2,
      sclEdges: changes.filter((change) => change.line === "scl").length,
      sdaEdges: changes.filter((change) => change.line === "sda").length,
      rowsSetAside: 0,
    });
    expect(out.codes).toEqual(["channels-assumed"]);
  });

  it("reads the same whatever the chunks are", async () => {
    const whole = await readVcd(PLAIN);
    await fc.assert(
      fc.asyncProperty(fc.array(fc.integer({ min: 1, max: 400 }), { minLength: 1, maxLength: 5 }), async (lengths) => {
        const cut = await readVcd(PLAIN, {}, lengths);
        expect(cut.edges).toEqual(whole.edges);
        expect(cut.tail).toEqual(whole.tail);
      }),
      { numRuns: 40 },
    );
  });

  it("tells identifier codes that begin with $ # b digits from keywords, times and values", async () => {
    for (const codes of [
      { scl: "$", sda: "#" },
      { scl: "$end", sda: "$dumpvars" },
      { scl: "#10", sda: "b1" },
      { scl: "0", sda: "1" },
      { scl: "01", sda: "x" },
      { scl: "r1.5", sda: "s" },
      { scl: "!!", sda: "!" },
      { scl: "AVeryLongIdentifierCode~1", sda: "AVeryLongIdentifierCode~2" },
    ]) {
      const declared = header(`$var wire 1 ${codes.scl} scl $end`, `$var wire 1 ${codes.sda} sda $end`);
      const out = await readVcd(vcdOf(changes, end, { header: declared, change: spelt(codes) }));
      expect(out.said, JSON.stringify(codes)).toBe(SAID);
    }
  });

  it("takes any white space, indentation and one line for everything", async () => {
    expect((await readVcd(PLAIN.replace(/\s+/g, " "))).said).toBe(SAID);
    expect((await readVcd(PLAIN.replace(/\n/g, "\r\n\t  \n"))).said).toBe(SAID);
    expect((await readVcd(PLAIN.trimEnd())).said).toBe(SAID);
    expect((await readVcd(`\ufeff${PLAIN}`)).said).toBe(SAID);
  });

  it("does without $dumpvars, $date and $version, and takes $comment anywhere", async () => {
    const bare = vcdOf(changes, end, { initial: '1!\n1"' }).replace("#1000", "$comment 0! #5 $dumpoff\n b1 $end\n#1000");
    expect((await readVcd(bare)).said).toBe(SAID);
  });

  it("keeps remarks of the header", async () => {
    const out = await readVcd(`$date\n  today\n$end $version bench 1 $end ${PLAIN}`);
    expect(out.head.metadata).toEqual([
      ["date", "today"],
      ["version", "bench 1"],
      ["timescale", "1 ns"],
    ]);
  });

  it("takes a header of any size", async () => {
    const many = Array.from({ length: 30_000 }, (_, i) => `$var wire 1 z${i} net_${i} $end`);
    const out = await readVcd(
      vcdOf(changes, end, { header: header(...many, '$var wire 1 ! scl $end $var wire 1 " sda $end') }),
      {},
      [5000],
    );
    expect(out.said).toBe(SAID);
    expect(out.head.channels.length).toBe(30_002);
  });

  it.each([
    ["1s", 1],
    ["10 ms", 100],
    ["100 us", 1e4],
    ["1 ps", 1e12],
    ["100ps", 1e10],
    ["10 fs", 1e14],
    ["1\n\tfs", 1e15],
  ])("timescale %s", async (scale, perSecond) => {
    expect((await readVcd(PLAIN.replace("1 ns", scale))).head.timebase).toEqual({ ticksPerSecond: perSecond, origin: "file" });
  });

  it("says so where there is no timescale, and takes a given one", async () => {
    const without = PLAIN.replace("$timescale 1 ns $end", "");
    const assumed = await readVcd(without);
    expect(assumed.head.timebase).toEqual({ ticksPerSecond: 1, origin: "assumed" });
    expect(assumed.codes).toContain("no-time-base");
    expect((await readVcd(without, { interval_s: 1e-8 })).head.timebase).toEqual({ ticksPerSecond: 1e8, origin: "given" });
    expect((await readVcd(PLAIN.replace("1 ns", "0ps"))).head.timebase.origin).toBe("assumed");
  });

  it("counts a last time without a change as the end", async () => {
    expect((await readVcd(`${PLAIN}#${end + 500}\n`)).tail.endTick).toBe(end + 500);
  });
});

describe("one instant", () => {
  const both = (first: string, second: string) =>
    `${HEADER}#0 1! 1" #10 0" #20 0! #30 1" #40 1! #50\n${first}\n#50\n${second}\n#60 0" #70 0! #100`;
  it("merges changes of both lines, whichever is written first and however often the time is", async () => {
    const one = await readVcd(both("0!", '0"'), { scl: "scl", sda: "sda" });
    const other = await readVcd(both('0"', "0!"), { scl: "scl", sda: "sda" });
    expect(one.edges).toEqual(other.edges);
    expect(one.edges.filter((edge) => edge.tick === 50)).toEqual([{ tick: 50, lines: 0 }]);
  });

  it("counts the value that stands at the end of a tick", async () => {
    const out = await readVcd(`${HEADER}#0 1! 1" #10 0" 1" 0" #20 0! 1! #30 1" 0" #40`, { scl: "scl", sda: "sda" });
    expect(out.edges).toEqual([
      { tick: 0, lines: SCL | SDA },
      { tick: 10, lines: SCL },
    ]);
  });
});

describe("names and vectors", () => {
  it("takes several variables on one code, scopes opened again, escaped names", async () => {
    const declared = [
      "$timescale 1ns $end $scope module top $end $var wire 1 ! clk_line $end $upscope $end",
      '$scope module top $end $scope begin inner $end $var wire 1 ! scl $end $var wire 1 " \\odd.sda[0] $end $upscope $end $upscope $end',
      "$enddefinitions $end\n",
    ].join("\n");
    const out = await readVcd(vcdOf(changes, end, { header: declared }));
    expect(out.head.channels.map((channel) => channel.id)).toEqual(["top.clk_line", "top.inner.scl", "top.inner.odd.sda[0]"]);
    expect(out.head.proposal).toMatchObject({ scl: "top.inner.scl", sda: "top.inner.odd.sda[0]" });
    expect(out.said).toBe(SAID);
    // Two names of one net are one line: no ambiguity, in full or in part.
    expect((await readVcd(vcdOf(changes, end, { header: declared }), { scl: "clk_line", sda: "odd.sda[0]" })).said).toBe(SAID);
  });

  const levels = { scl: 1, sda: 1 };
  const vector = (digits: (scl: number, sda: number) => string) => (line: "scl" | "sda", level: 0 | 1) => {
    levels[line] = level;
    return `b${digits(levels.scl, levels.sda)} #`;
  };

  it.each([
    ["lines [1:0]", "lines[0]", "lines[1]", (scl: number, sda: number) => `${sda}${scl}`],
    ["lines[3:0]", "lines[0]", "lines[2]", (scl: number, sda: number) => `1${sda}0${scl}`],
    ["lines [8:15]", "top.lines[15]", "top.lines[8]", (scl: number, sda: number) => `${sda}010101${scl}`],
    ["nib[2] [5:4]", "nib[2][4]", "nib[2][5]", (scl: number, sda: number) => `${sda}${scl}`],
  ])("one bit of a vector: %s", async (reference, scl, sda, digits) => {
    const size = digits(1, 1).length;
    const text = vcdOf(changes, end, { header: header(`$var wire ${size} # ${reference} $end`), change: vector(digits) });
    expect((await readVcd(text, { scl, sda })).said).toBe(SAID);
  });

  it("finds the bits of an unnamed vector by behaviour", async () => {
    const text = vcdOf(changes, end, {
      header: header("$var wire 4 # pads [3:0] $end"),
      change: vector((scl, sda) => `${scl}0${sda}1`),
    });
    const out = await readVcd(text);
    expect(out.head.proposal).toMatchObject({ scl: "top.pads[3]", sda: "top.pads[1]", basis: "behaviour" });
    expect(out.said).toBe(SAID);
  });

  it("extends shortened vectors to the left: 0 and 1 with 0, x with x, z with z (18.2.2)", async () => {
    const text = `${header("$var wire 4 # p [3:0] $end", "$var wire 1 ! q $end")}#0 b1111 # #10 b1 # #20 b1111 # #30 bx # #40 bz # #50`;
    const out = await readVcd(text, { scl: "p[3]", sda: "p[0]" });
    expect(out.edges.map(({ tick, lines }) => [tick, lines])).toEqual([
      [0, SCL | SDA],
      [10, SDA],
      [20, SCL | SDA],
      [30, SCL_UNKNOWN | SDA_UNKNOWN],
      [40, SCL | SDA],
    ]);
  });

  it("takes one bit of a vector too wide to be listed", async () => {
    const wide = (line: "scl" | "sda", level: 0 | 1) => {
      levels[line] = level;
      return `b${levels.sda}${"0".repeat(38)}${levels.scl} #`;
    };
    const text = vcdOf(changes, end, { header: header("$var reg 40 # port [39:0] $end"), change: wide });
    const out = await readVcd(text, { scl: "port[0]", sda: "top.port[39]" });
    expect(out.said).toBe(SAID);
    expect(out.head.channels[0]).toMatchObject({ id: "top.port[39:0]", kind: "other" });
  });

  it("takes a separate [n] token, a bit dumped alone, a size of one with a range, integers", async () => {
    const declared = header("$var wire 1 ! pins [0] $end", '$var wire 1 " pins[1] $end', "$var integer 32 i count [31:0] $end");
    const out = await readVcd(vcdOf(changes, end, { header: declared }), { scl: "pins[0]", sda: "pins [1]" });
    expect(out.said).toBe(SAID);
    expect(out.head.channels.at(-1)).toMatchObject({ id: "top.count[31:0]", kind: "other" });
  });
});

describe("states other than 0 and 1", () => {
  const nine = (line: "scl" | "sda", level: 0 | 1) => `${level ? "H" : "0"}${line === "scl" ? "!" : '"'}`;
  it("takes H as high and L as low, in scalars and vectors", async () => {
    expect((await readVcd(vcdOf(changes, end, { change: nine }))).said).toBe(SAID);
    const weak = (line: "scl" | "sda", level: 0 | 1) => `${level ? "h" : "L"}${line === "scl" ? "!" : '"'}`;
    expect((await readVcd(vcdOf(changes, end, { change: weak }))).said).toBe(SAID);
  });

  it("takes z as high because a bus line has a pull-up, says so, and does not where there is none", async () => {
    const open = (line: "scl" | "sda", level: 0 | 1) => `${level ? "z" : "0"}${line === "scl" ? "!" : '"'}`;
    const text = vcdOf(changes, end, { change: open });
    const out = await readVcd(text);
    expect(out.said).toBe(SAID);
    expect(out.tail.warnings).toMatchObject([{ code: "z-taken-high" }]);
    const without = await readVcd(text, { pullup: false });
    expect(without.said).toBe("");
    expect(without.codes).toContain("unknown-levels");
  });

  it.each(["x", "X", "U", "W", "-", "u", "w"])("leaves %s unknown and decodes nothing through it", async (letter) => {
    const lines = PLAIN.split("\n");
    lines.splice(lines.indexOf("#1000") + 12, 0, `${letter}"`);
    const out = await readVcd(lines.join("\n"));
    expect(out.edges.some((edge) => edge.lines & SDA_UNKNOWN)).toBe(true);
    expect(out.codes).toContain("unknown-levels");
    expect(out.said).toContain("S 90 A FF A 35 A P");
    expect(out.said).not.toContain("A0 A 01 A 7E A P");
  });

  it("cuts the record where recording was off", async () => {
    const off = PLAIN.replace(
      `#${end}`,
      `#${end}\n$dumpoff\nx!\nx"\n$end\n#${end + 900}\n$dumpon\n1!\n0"\n$end\n#${end + 950}\n1"\n#${end + 990}`,
    );
    const out = await readVcd(off);
    expect(out.edges.slice(-3)).toEqual([
      { tick: end, lines: SCL_UNKNOWN | SDA_UNKNOWN },
      { tick: end + 900, lines: SCL | CUT },
      { tick: end + 950, lines: SCL | SDA },
    ]);
    expect(out.tail.warnings).toMatchObject([{ code: "not-recorded", count: 1 }]);
    expect(out.said).toBe(SAID);
  });

  it("passes by strings, events, reals and keywords it does not know", async () => {
    const declared = header(
      '$var wire 1 ! scl $end $var wire 1 " sda $end',
      "$var string 1 s state $end $var event 1 e hit $end $var real 1 v supply $end",
    );
    const text = vcdOf(changes, end, { header: declared }).replace("#1000", "sIDLE s\n1e\nr3.3 v\nrNaN v\n$attr a b $end\n#1000");
    expect((await readVcd(text)).said).toBe(SAID);
  });

  it("maps the states of an extended VCD's ports", async () => {
    const port = (line: "scl" | "sda", level: 0 | 1) =>
      `p${level ? (line === "scl" ? "U" : "h") : line === "scl" ? "D" : "L"} 6 0 ${line === "scl" ? "<0" : "<1"}`;
    const text = vcdOf(changes, end, {
      header: header("$var port 1 <0 scl $end", "$var port 1 <1 sda $end"),
      initial: "$dumpports\npU 0 6 <0\nph 0 5 <1\n$end",
      change: port,
    });
    expect((await readVcd(`${text}$vcdclose #${end + 7} $end\n`)).tail.endTick).toBe(end + 7);
    expect((await readVcd(text)).said).toBe(SAID);
  });

  it("reads what a two-state simulator writes: no $date, indented lines, full vectors, no $dumpvars", async () => {
    const declared = `$version Generated $end
$timescale 1ps $end

 $scope module TOP $end
  $var wire  1 # scl $end
  $scope module bench $end
   $var wire  1 $ sda $end
   $var wire  8 % cnt [7:0] $end
   $var real  64 & supply $end
  $upscope $end
 $upscope $end
$enddefinitions $end

`;
    const slow = changesOf(TALK, 2_500_000);
    const text = vcdOf(slow.changes, slow.end, {
      header: declared,
      initial: "b00000000 %\nr0 &\n1#\n1$",
      change: spelt({ scl: "#", sda: "$" }),
    });
    expect((await readVcd(text.replaceAll("\n#", "\n\n#"))).said).toBe(SAID);
  });
});

describe("reals as volts", () => {
  const step = (line: "scl" | "sda", level: 0 | 1) => `r${level ? "3.3" : "0.12"} ${line === "scl" ? "!" : '"'}`;
  const declared = header("$var real 1 ! scl $end", '$var real 1 " sda $end');

  it("compares at 0.3 and 0.7 of the supply that the values show", async () => {
    const out = await readVcd(vcdOf(changes, end, { header: declared, change: step }));
    expect(out.said).toBe(SAID);
    expect(out.head).toMatchObject({ levels: "volts", vdd_v: 3.3 });
    expect(out.head.vil_v).toBeCloseTo(0.99, 9);
    expect(out.head.vih_v).toBeCloseTo(2.31, 9);
    const { volts, length } = out.blocks[0];
    expect(volts?.meanScl[1]).toBeCloseTo(3.3, 5);
    expect(volts?.meanSda[1]).toBeCloseTo(0.12, 5);
    expect(Array.from(volts?.leadScl.slice(1, length) ?? []).every((lead) => lead === 0)).toBe(true);
  });

  it("gives the time between the thresholds, and visits that became no level", async () => {
    const text = `${declared}#0 r3.3 ! r3.3 " #100 r0 " #200 r0 ! #300 r1.2 ! #340 r2 ! #380 r2.5 ! #500 r1.5 ! #540 r3.3 ! #600 r3.3 " #700`;
    const out = await readVcd(text, { scl: "scl", sda: "sda", vdd_v: 3.3 });
    expect(out.edges.map((edge) => edge.tick)).toEqual([0, 100, 200, 380, 600]);
    expect(out.blocks.flatMap((block) => Array.from(block.volts?.leadScl ?? [])).slice(3, 4)).toEqual([80]);
    expect(out.tail.excursions).toEqual([{ line: "scl", tick: 500, width: 40, extreme_v: 1.5 }]);
  });
});

describe("drive taps", () => {
  it("gives a tap's lines with 1 for released, whatever a 1 means in the file", async () => {
    const declared = header('$var wire 1 ! scl $end $var wire 1 " sda $end $var wire 1 a sda_oe $end $var wire 1 z sda_z $end');
    const text = `${declared}#0 1! 1" 0a zz #10 0" 1a 0z #20 1" 0a zz #40`;
    const taps = [
      { label: "M1", scl: null, sda: "sda_oe", polarity: "drive" },
      { label: "M2", scl: null, sda: "sda_z", polarity: "release" },
    ] as const;
    const out = await readVcd(text, { scl: "scl", sda: "sda", taps });
    const expected = [
      { tick: 0, lines: SCL_UNKNOWN | SDA },
      { tick: 10, lines: SCL_UNKNOWN },
      { tick: 20, lines: SCL_UNKNOWN | SDA },
    ];
    expect(out.taps).toEqual([expected, expected]);
    expect(out.head.taps[0]).toMatchObject({ label: "M1", scl: null, sda: "top.sda_oe" });
  });
});

describe("damaged but readable", () => {
  it("sets aside what stands where time goes back, and cuts the record", async () => {
    const lines = PLAIN.split("\n");
    const at = lines.indexOf(`#${end}`);
    lines.splice(at, 0, "#1200", "0!", '0"', "1!", '1"');
    const out = await readVcd(lines.join("\n"));
    expect(out.said).toBe(SAID);
    expect(out.tail.warnings).toMatchObject([{ code: "time-backwards", line: at + 1 }]);
    expect(out.tail.rowsSetAside).toBeGreaterThan(0);
  });

  it.each([
    ["inside a code-less value", `${PLAIN}1`],
    ["inside a vector", `${PLAIN}b101`],
    ["inside a time", `${PLAIN}#`],
    ["inside a shortened time", `${PLAIN}#1`],
    ["inside a comment", `${PLAIN}$comment and then`],
    ["inside a dump", `${PLAIN}#99999\n$dumpall\n1!`],
  ])("reads a file that ends %s, and says that it was cut off", async (_, text) => {
    const out = await readVcd(text);
    expect(out.said).toBe(SAID);
    expect(out.codes).toContain("truncated");
  });

  it("reads every cut of a file without throwing", async () => {
    const start = PLAIN.indexOf("#1000");
    for (let length = start; length < PLAIN.length; length += 7) {
      const opened = await openVcd(sourceOf(PLAIN.slice(0, length)), { scl: "scl", sda: "sda" }, false);
      expect(opened.ok).toBe(true);
      if (opened.ok) {
        const tail = await opened.value.read({ edges: () => undefined, tap: () => undefined, progress: () => undefined });
        expect(tail.ok).toBe(true);
      }
    }
  });

  it("leaves out changes of codes that nobody declared, and says so", async () => {
    const out = await readVcd(PLAIN.replace("#1000", "1?\n#1000"));
    expect(out.said).toBe(SAID);
    expect(out.codes).toContain("undeclared-code");
  });
});

describe("generated traffic", () => {
  const byte = fc.tuple(fc.integer({ min: 0, max: 255 }), fc.boolean());
  it("comes out as it went in, among unrelated signals", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.array(byte, { minLength: 1, maxLength: 5 }), { minLength: 1, maxLength: 6 }),
        fc.integer({ min: 1, max: 97 }),
        async (messages, chunk) => {
          const said = messages.flatMap((bytes): Said[] => ["S", ...bytes, "P"]);
          const traffic = changesOf(said, 40);
          let n = 0;
          const noisy = (line: "scl" | "sda", level: 0 | 1) =>
            `${n++ % 2}n\nb${n % 8 === 0 ? "x" : (n % 256).toString(2)} v\n${level}${line === "scl" ? "!" : '"'}`;
          const declared = header(
            '$var wire 1 ! scl $end $var wire 1 " sda $end $var wire 1 n noise $end $var wire 8 v bus [7:0] $end',
          );
          const out = await readVcd(
            vcdOf(traffic.changes, traffic.end, { header: declared, change: noisy }),
            { scl: "scl", sda: "sda" },
            [chunk],
          );
          const expected = said.map((item) =>
            typeof item === "string" ? item : `${item[0].toString(16).toUpperCase().padStart(2, "0")} ${item[1] ? "A" : "N"}`,
          );
          expect(out.said).toBe(expected.join(" "));
        },
      ),
      { numRuns: 60 },
    );
  });
});
