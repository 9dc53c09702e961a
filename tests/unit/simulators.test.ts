// Outside check: VCDs written by real simulators, Icarus Verilog and GHDL (Debian packages iverilog and ghdl), from our own
// benches in fixtures/simulators. What they must decode to stands in the benches.

import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { CUT, SCL, SDA } from "@/lib/engine/samples/edges";
import { type ReadOut, readVcd } from "../support/vcd";

const benches = new URL("../../fixtures/simulators/", import.meta.url).pathname;
let folder = "";

function run(program: string, ...args: string[]): string {
  try {
    return execFileSync(program, args, { cwd: folder, encoding: "utf8", timeout: 60_000, stdio: ["ignore", "pipe", "pipe"] });
  } catch (error) {
    if (error instanceof Error && "code" in error && error.code === "ENOENT") {
      throw new Error(`${program} is missing. Install the simulators: apt-get install -y --no-install-recommends iverilog ghdl`);
    }
    throw error;
  }
}

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "firstlow-simulators-"));
  run("iverilog", "-g2005", "-o", "contend", join(benches, "contend.v"));
  run("vvp", "contend", "+dump=contend.vcd");
  run("vvp", "contend", "+dump=off.vcd", "+off");
  run("ghdl", "-a", join(benches, "resolved.vhd"));
  run("ghdl", "-e", "resolved");
  run("ghdl", "-r", "resolved", "--vcd=resolved.vcd", "--stop-time=1ms");
});

afterAll(() => rmSync(folder, { recursive: true, force: true }));

const dump = (name: string) => new Uint8Array(readFileSync(join(folder, name)));

/** Instants of the edges, which every way of dumping the same lines must share. */
const levels = ({ edges }: ReadOut) => edges.map(({ tick, lines }) => [tick, lines & (SCL | SDA)]);

describe("Icarus Verilog", () => {
  // The message with data 1D keeps the bus against 5D (first difference: bit 6, 0 against 1), which is sent again after it.
  const SAID = "S A0 A 1D A P S A0 A 5D A P S A0 A 1D A P";

  it("two controllers contend on a pulled-up net", async () => {
    const out = await readVcd(dump("contend.vcd"));
    expect(out.said).toBe(SAID);
    expect(out.head.proposal).toMatchObject({ scl: "bench.scl", sda: "bench.sda", basis: "names" });
    expect(out.head.timebase).toEqual({ ticksPerSecond: 1e10, origin: "file" });
    expect(out.head.warnings.map((warning) => warning.code)).toEqual(["channels-assumed", "tap-channels"]);
    expect(out.head.channels.map((channel) => channel.id)).toContain("bench.odd.name[3]");
  });

  it("the same net under another scope's name, and as bits of a vector", async () => {
    const bus = await readVcd(dump("contend.vcd"));
    const alias = await readVcd(dump("contend.vcd"), { scl: "bench.eeprom.scl", sda: "eeprom.sda" });
    const bits = await readVcd(dump("contend.vcd"), { scl: "pads[0]", sda: "pads[1]" });
    expect(levels(alias)).toEqual(levels(bus));
    expect(levels(bits)).toEqual(levels(bus));
  });

  it("the lines in volts, with rise times that the bench's time constant gives", async () => {
    const out = await readVcd(dump("contend.vcd"), { scl: "scl_volts", sda: "sda_volts" });
    expect(out.said).toBe(SAID);
    expect(out.head.levels).toBe("volts");
    expect(out.head.vdd_v).toBeCloseTo(3.3, 3);
    // 30 % to 70 % of an RC rise is 0.8473 RC (UM10204 7.1): 381 ns of 450 ns, sampled every 50 ns, ticks of 100 ps.
    const rises = out.blocks.flatMap(({ volts, lines, length }) =>
      Array.from({ length }, (_, i) => (lines[i] & SCL && volts ? volts.leadScl[i] : 0)).filter((lead) => lead > 0),
    );
    expect(rises.length).toBeGreaterThan(50);
    for (const lead of rises) expect(Math.abs(lead / 10 - 381)).toBeLessThanOrEqual(50);
  });

  it("what each controller drives, as taps", async () => {
    const taps = [
      { label: "left", scl: "left.scl_oe", sda: "left.sda_oe", polarity: "drive" },
      { label: "right", scl: "right.scl_oe", sda: "right.sda_oe", polarity: "drive" },
    ] as const;
    const out = await readVcd(dump("contend.vcd"), { scl: "bench.scl", sda: "bench.sda", taps });
    // At SCL high of the deciding bit the one that yields has released SDA while the bus is low.
    const at = (entries: readonly { tick: number; lines: number }[], tick: number) =>
      entries.filter((entry) => entry.tick <= tick).at(-1)?.lines ?? 0;
    const against = out.edges.filter(
      (edge) => edge.lines === SCL && (at(out.taps[1], edge.tick) & SDA) !== 0 && (at(out.taps[0], edge.tick) & SDA) === 0,
    );
    expect(against.length).toBeGreaterThan(0);
    expect(out.taps[0].length).toBeGreaterThan(50);
  });

  it("a pause of the dump cuts the record", async () => {
    const out = await readVcd(dump("off.vcd"), { scl: "bench.scl", sda: "bench.sda" });
    expect(out.said).toBe(SAID);
    expect(out.codes).toEqual(["not-recorded"]);
    expect(out.edges.filter((edge) => edge.lines & CUT).length).toBe(1);
  });
});

describe("GHDL", () => {
  it("resolved nine-value logic with weak pull-ups", async () => {
    const out = await readVcd(dump("resolved.vcd"));
    expect(out.said).toBe("S 92 A 3C A Sr 93 A A6 N P");
    expect(out.head.proposal).toMatchObject({ scl: "resolved.scl", sda: "resolved.sda" });
    expect(out.head.timebase).toEqual({ ticksPerSecond: 1e15, origin: "file" });
    expect(out.codes).toEqual(["channels-assumed"]);
  });

  it("bits of a resolved vector", async () => {
    const bus = await readVcd(dump("resolved.vcd"));
    const bits = await readVcd(dump("resolved.vcd"), { scl: "lines[0]", sda: "lines[1]" });
    // The vector follows its signals one delta cycle later, in the same instant.
    expect(levels(bits)).toEqual(levels(bus));
  });
});
