import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { findChannel } from "@/lib/engine/channels/names";
import { needsMore, proposeChannels } from "@/lib/engine/channels/propose";
import type { LineTrace } from "@/lib/engine/channels/trace";
import type { Channel, ReadChoices } from "@/lib/engine/samples/reader";
import { changesOf, lineAt, type Said, traceOf, write } from "../support/vcd-bus";

const TALK = [...write(0x50, 0x01, 0x7e), ...write(0x48, 0xff, 0x00, 0x35), ...write(0x21, 0xaa)];
const { changes } = changesOf(TALK);
const bus = (scl: string, sda: string): LineTrace[] => [traceOf(changes, "scl", "@2", scl), traceOf(changes, "sda", "@3", sda)];

function propose(traces: readonly LineTrace[], choices: Pick<ReadChoices, "scl" | "sda"> = {}) {
  const channels: Channel[] = traces.map(({ id, name }) => ({ id, name, unit: null, kind: "digital" }));
  return proposeChannels(traces, channels, choices);
}

function accepted(traces: readonly LineTrace[], choices: Pick<ReadChoices, "scl" | "sda"> = {}) {
  const result = propose(traces, choices);
  if (!result.ok) throw new Error(result.problem.message);
  return result.value;
}

function refused(traces: readonly LineTrace[], choices: Pick<ReadChoices, "scl" | "sda"> = {}) {
  const result = propose(traces, choices);
  if (result.ok) throw new Error(`accepted: ${result.value.reason}`);
  return result.problem;
}

const codes = (proposal: { warnings: readonly { code: string }[] }) => proposal.warnings.map((warning) => warning.code);

describe("finding SCL and SDA", () => {
  it.each([
    ["SCL", "SDA"],
    ["scl", "sda"],
    ["I2C0_SCL (V)", "I2C0_SDA (V)"],
    ["SMBCLK", "SMBDAT"],
    ["bus clk", "bus data"],
    ["Takt", "Daten"],
  ])("takes %s and %s by name", (scl, sda) => {
    const proposal = accepted(bus(scl, sda));
    expect(proposal).toMatchObject({ scl: "@2", sda: "@3", basis: "names" });
    expect(codes(proposal)).toEqual(["channels-assumed"]);
    expect(proposal.preview).toMatchObject({ transactions: 3, wholeBytes: 9, breaks: 0 });
    expect(proposal.preview?.firstBytes).toMatch(/^S A0 A 01 A 7E A P S 90 A FF A 00 A/);
    expect(proposal.swapped?.wholeBytes).toBe(0);
  });

  it.each([
    ["D0", "D1"],
    ["7", "12"],
    ["", ""],
    ["CH", "CH"],
  ])("finds %j and %j by behaviour, in either column order", (one, other) => {
    expect(accepted(bus(one, other))).toMatchObject({ scl: "@2", sda: "@3", basis: "behaviour" });
    expect(accepted(bus(one, other).reverse())).toMatchObject({ scl: "@2", sda: "@3", basis: "behaviour" });
  });

  it("proposes the swap of swapped labels and says so", () => {
    const proposal = accepted(bus("SDA", "SCL"));
    expect(proposal).toMatchObject({ scl: "@2", sda: "@3", basis: "behaviour" });
    expect(codes(proposal)).toEqual(["channels-assumed", "channels-swapped"]);
    expect(proposal.reason).toContain("swapped");
  });

  it("keeps an explicit choice, and warns when the swap reads clearly better", () => {
    expect(codes(accepted(bus("A", "B"), { scl: "A", sda: "B" }))).toEqual([]);
    const wrong = accepted(bus("A", "B"), { scl: "@3", sda: "A" });
    expect(wrong).toMatchObject({ scl: "@3", sda: "@2", basis: "given" });
    expect(codes(wrong)).toEqual(["channels-swapped"]);
  });

  it("finds the partner of one given line", () => {
    expect(accepted(bus("x", "y"), { scl: "x" })).toMatchObject({ scl: "@2", sda: "@3" });
    expect(accepted(bus("x", "y"), { sda: "y" })).toMatchObject({ scl: "@2", sda: "@3" });
  });

  it("finds the pair among unrelated lines", () => {
    const clock = Array.from({ length: 4000 }, (_, i) => 7 + i * 4);
    const noise = Array.from({ length: 90 }, (_, i) => 311 + i * 97 + ((i * i) % 41));
    const lines = [
      lineAt(clock, "t.clk"),
      lineAt(noise, "t.n1"),
      ...bus("n2", "n3"),
      lineAt([5000], "t.reset"),
      lineAt([], "t.gnd"),
    ];
    expect(accepted(lines)).toMatchObject({ scl: "@2", sda: "@3", basis: "behaviour" });
  });

  it("prefers the bus to a controller's own lines, and says that those look like taps", () => {
    // The controller releases SDA for the acknowledge, which a target pulls.
    const own = changesOf(TALK.map((item): Said => (typeof item === "string" ? item : [item[0], false]))).changes;
    const lines = [
      traceOf(own, "scl", "t.m1.scl_o", "scl_o"),
      traceOf(own, "sda", "t.m1.sda_o", "sda_o"),
      traceOf(changes, "scl", "t.scl", "scl"),
      traceOf(changes, "sda", "t.sda", "sda"),
    ];
    const proposal = accepted(lines);
    expect(proposal).toMatchObject({ scl: "t.scl", sda: "t.sda" });
    expect(proposal.warnings.find((warning) => warning.code === "tap-channels")?.message).toContain("t.m1.sda_o (1 releases)");
  });

  it("keeps to the lines that are named as the bus, though noise breaks bytes on it and a tap is clean", () => {
    const noisy = changes.flatMap((change, i) =>
      // Every 40th change is followed by a dip of SDA in the high of SCL: a START and a STOP inside a byte.
      change.line === "scl" && change.level === 1 && i % 40 === 39
        ? [
            change,
            { tick: change.tick + 10, line: "sda" as const, level: 0 as const },
            { tick: change.tick + 14, line: "sda" as const, level: 1 as const },
          ]
        : [change],
    );
    const own = changesOf(TALK.map((item): Said => (typeof item === "string" ? item : [item[0], false]))).changes;
    const lines = [
      traceOf(own, "scl", "@4", "left_scl"),
      traceOf(own, "sda", "@5", "left_sda"),
      traceOf(noisy, "scl", "@2", "SCL"),
      traceOf(noisy, "sda", "@3", "SDA"),
    ];
    expect(accepted(lines)).toMatchObject({ scl: "@2", sda: "@3", basis: "names" });
  });

  it("accepts named lines whose bytes are mostly broken", () => {
    const broken = changesOf(
      Array.from({ length: 30 }, (_, i): Said[] => ["S", [0xa4, true], "P", "S", [i, true], "P"]).flat(),
    ).changes.filter(
      // Every 23rd pulse of SCL is missing.
      (change, i, all) =>
        change.line === "sda" || (all.slice(0, i).filter((other) => other.line === "scl").length >> 1) % 23 !== 22,
    );
    expect(accepted([traceOf(broken, "scl", "SCL"), traceOf(broken, "sda", "SDA")])).toMatchObject({ scl: "SCL", sda: "SDA" });
  });

  it("takes the first of identical and of buffered copies and names the others", () => {
    const later = {
      ...traceOf(changes, "sda", "@5", "SDA far"),
      ticks: traceOf(changes, "sda", "x").ticks.map((tick) => tick + 2),
    };
    const proposal = accepted([...bus("SCL", "SDA"), traceOf(changes, "scl", "@4", "SCL copy"), later]);
    expect(proposal).toMatchObject({ scl: "@2", sda: "@3" });
    expect(proposal.reason).toContain("@4 (SCL copy), @5 (SDA far) carry the same signal");
  });

  it("takes the first of two buses and names the other", () => {
    const second = changesOf(write(0x33, 1, 2, 3), 19, 4000).changes;
    const lines = [
      traceOf(changes, "scl", "a.SCL0", "SCL0"),
      traceOf(changes, "sda", "a.SDA0", "SDA0"),
      traceOf(second, "scl", "a.SCL1", "SCL1"),
      traceOf(second, "sda", "a.SDA1", "SDA1"),
    ];
    const proposal = accepted(lines);
    expect(proposal).toMatchObject({ scl: "a.SCL0", sda: "a.SDA0" });
    expect(proposal.warnings.find((warning) => warning.code === "other-buses")?.message).toContain("a.SCL1 with a.SDA1");
  });

  it("accepts named lines of a stuck bus, provisionally", () => {
    const stuck = [lineAt([100, 200, 300, 400], "SCL", 1), lineAt([], "SDA", 0)];
    expect(accepted(stuck)).toMatchObject({ scl: "SCL", sda: "SDA", provisional: true });
  });

  it("asks for more where the survey holds a quiet head or the first bits only", () => {
    expect(needsMore(propose([lineAt([], "SCL", 1), lineAt([], "SDA", 1)]))).toBe(true);
    const head = changes.filter((change) => change.tick < 1400);
    const result = propose([traceOf(head, "scl", "a"), traceOf(head, "sda", "b")]);
    expect(result).toMatchObject({ ok: true, value: { scl: "a", sda: "b", provisional: true } });
    expect(needsMore(propose(bus("a", "b")))).toBe(false);
  });

  it("finds generated traffic whatever it says", () => {
    const byte = fc.tuple(fc.integer({ min: 0, max: 255 }), fc.boolean());
    const message = fc.tuple(fc.array(byte, { minLength: 1, maxLength: 6 }), fc.boolean());
    fc.assert(
      fc.property(fc.array(message, { minLength: 2, maxLength: 12 }), fc.integer({ min: 4, max: 900 }), (messages, quarter) => {
        // A first byte that moves SDA: one that never does is told from a free-running clock by nothing.
        const said = messages.flatMap(([bytes, again]): Said[] => [
          "S",
          [0xa4, true],
          ...bytes,
          ...(again ? (["Sr", [0x5b, true]] as Said[]) : []),
          "P",
        ]);
        const traffic = changesOf(said, quarter).changes;
        const result = accepted([traceOf(traffic, "sda", "one"), traceOf(traffic, "scl", "two")]);
        expect(result).toMatchObject({ scl: "two", sda: "one" });
        expect(result.preview?.breaks).toBe(0);
      }),
    );
  });
});

describe("refusing what is no bus", () => {
  const pwm = (id: string, period: number, high: number) =>
    lineAt(
      Array.from({ length: 400 }, (_, i) => (i >> 1) * period + (i % 2) * high + 10),
      id,
    );

  it("one channel", () => {
    expect(refused([pwm("@2", 100, 30)])).toMatchObject({
      code: "one-channel",
      message:
        "Only one channel is here: @2, which is a steady pulse train, 30 % high, as of a PWM or a free-running clock. A two-wire bus needs SCL and SDA.",
    });
  });

  it("no channel", () => {
    expect(refused([])).toMatchObject({ code: "no-channels" });
  });

  it("flat lines, each with its level", () => {
    expect(refused([lineAt([], "@2", 1), lineAt([], "@3", 0)])).toMatchObject({
      code: "no-activity",
      message: "No line of this file changes: @2 stays high; @3 stays low.",
    });
  });

  it("one moving line", () => {
    expect(refused([lineAt([], "a", 1), pwm("b", 100, 50)])).toMatchObject({ code: "no-clock" });
  });

  it("motor signals", () => {
    const problem = refused([pwm("U", 100, 30), pwm("V", 100, 55), pwm("W", 100, 70)]);
    expect(problem.code).toBe("not-a-bus");
    expect(problem.message).toContain("U is a steady pulse train, 30 % high");
  });

  it("motor signals labelled as a bus", () => {
    expect(refused([pwm("SCL", 100, 30), pwm("SDA", 100, 55)])).toMatchObject({ code: "not-a-bus" });
  });

  it("SPI in all four modes", () => {
    for (const mode of [0, 1, 2, 3]) {
      const idle = (mode >> 1) as 0 | 1;
      const clock: number[] = [];
      const data: number[] = [];
      const select: number[] = [];
      let level = 0;
      for (let frame = 0; frame < 12; frame++) {
        const at = 1000 + frame * 3000;
        select.push(at - 40, at + 1650);
        for (let bit = 0; bit < 16; bit++) {
          const value = ((frame * 7919 + bit * 31) >> 2) & 1;
          const edge = at + bit * 100 + (mode % 2 === 0 ? -30 : 5);
          if (value !== level) data.push(edge);
          level = value;
          clock.push(at + bit * 100, at + bit * 100 + 50);
        }
      }
      const problem = refused([lineAt(clock, "ch0", idle), lineAt(data, "ch1"), lineAt(select, "ch2", 1)]);
      expect(problem.code, `mode ${mode}`).toBe("not-a-bus");
      expect(problem.message).toContain("groups of 8 pulses");
    }
  });

  it("two asynchronous serial lines", () => {
    const text = (seed: number) => {
      const ticks: number[] = [];
      let level = 1;
      for (let i = 0; i < 60; i++) {
        const value = ((seed * (i + 3) * 40503) >>> 3) & 255;
        const bits = [0, ...Array.from({ length: 8 }, (_, b) => (value >> b) & 1), 1];
        bits.forEach((bit, b) => {
          if (bit !== level) ticks.push(1000 + seed + i * 1144 + b * 104);
          level = bit;
        });
      }
      return ticks;
    };
    const problem = refused([lineAt(text(5), "a", 1), lineAt(text(77), "b", 1)]);
    expect(problem.code).toBe("not-a-bus");
    expect(problem.message).toContain("asynchronous serial line");
  });

  it("a choice that the file does not have, that is ambiguous, that is one channel twice", () => {
    expect(refused(bus("SCL", "SDA"), { scl: "clock" })).toMatchObject({
      code: "unknown-channel",
      message: 'There is no channel "clock" in this file; it has @2 (SCL), @3 (SDA).',
    });
    expect(refused(bus("CH", "CH"), { scl: "CH" })).toMatchObject({ code: "ambiguous-channel" });
    expect(refused(bus("a", "b"), { scl: "a", sda: "@2" })).toMatchObject({ code: "same-channel" });
  });
});

describe("naming a channel", () => {
  const channels = ["top.m1.scl", "top.m2.scl", "top.pads[0]", "top.pads[1]", "top.SDA"].map(
    (id): Channel => ({ id, name: id.slice(id.lastIndexOf(".") + 1), unit: null, kind: "digital" }),
  );
  it.each([
    ["top.m2.scl", "top.m2.scl"],
    ["m1.scl", "top.m1.scl"],
    ["pads[1]", "top.pads[1]"],
    ["pads [0]", "top.pads[0]"],
    ["sda", "top.SDA"],
  ])("%s is %s", (wanted, id) => {
    expect(findChannel(channels, wanted)).toMatchObject({ ok: true, value: { id } });
  });
});
