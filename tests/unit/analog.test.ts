// Outside check: an RC line worked out here from its own formula, v = VDD - (VDD - V0) exp(-t / RC) (UM10204 Rev 7 7.1: 30 % to 70 %
// takes 0.8473 RC), sampled with noise by an 8-bit converter, read back through the whole staircase.

import { describe, expect, test } from "vitest";
import { openArchive } from "@/lib/engine/archive/reader";
import { recordArchive } from "@/lib/engine/archive/record";
import { openCapture } from "@/lib/engine/samples/open";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { edgePoints } from "@/lib/limits/edges";
import { builtIn } from "@/lib/limits/profile";
import { createRandom } from "@/lib/simulation/random";
import { host } from "@/workers/host";
import { LineScript, reportOf } from "../support/line-script";
import { sourceOf } from "../support/vcd";

interface Line {
  readonly vdd: number;
  readonly ohm: number;
  readonly farad: number;
  readonly driverOhm: number;
}

/** Volts. */
interface Converter {
  readonly interval_ns: number;
  readonly noise: number;
  readonly step: number;
}

const settled = ({ vdd, ohm, driverOhm }: Line) => (vdd * driverOhm) / (ohm + driverOhm);
const rise = ({ ohm, farad }: Line) => ohm * farad * 1e9;
const fall = ({ ohm, farad, driverOhm }: Line) => ((ohm * driverOhm) / (ohm + driverOhm)) * farad * 1e9;

/** One line's voltage at every sample. */
function voltage(moves: readonly { tick: number; level: number }[], line: Line, end: number, interval: number): number[] {
  const out: number[] = [];
  let next = 0;
  let [from, since, target, tau] = [line.vdd, 0, line.vdd, 1];
  const at = (t: number) => target + (from - target) * Math.exp(-(t - since) / tau);
  for (let t = 0; t <= end; t += interval) {
    while (next < moves.length && moves[next].tick <= t) {
      const { tick, level } = moves[next++];
      [from, since] = [at(tick), tick];
      [target, tau] = level === 1 ? [line.vdd, rise(line)] : [settled(line), fall(line)];
    }
    out.push(at(t));
  }
  return out;
}

async function recorded(script: LineScript, line: Line, converter: Converter, choices: ReadChoices = {}, limits?: string) {
  const { ticks, lines } = script.edges();
  const moves = (bit: number) => [...ticks].map((tick, i) => ({ tick, level: (lines[i] & bit) === 0 ? 0 : 1 }));
  const end = script.now + 30_000;
  const random = createRandom(20);
  const seen = (v: number) => Math.round((v + converter.noise * random.gauss()) / converter.step) * converter.step;
  const [scl, sda] = [1, 2].map((bit) => voltage(moves(bit), line, end, converter.interval_ns));
  const rows = scl.map(
    (v, i) => `${(i * converter.interval_ns * 1e-9).toFixed(10)},${seen(v).toFixed(5)},${seen(sda[i]).toFixed(5)}`,
  );
  const bytes = new TextEncoder().encode(`Time [s],SCL [V],SDA [V]\n${rows.join("\n")}\n`);
  const source = {
    name: "line.csv",
    size: bytes.length,
    open: async function* () {
      yield bytes;
    },
  };
  const opened = await openCapture(source, host, choices);
  if (!opened.ok) throw new Error(opened.problem.message);
  const settings = limits === undefined ? {} : { limits };
  const report = await reportOf(opened.value, settings);
  // Read from its archive the same capture gives the same figures, to the last digit.
  const packed = await recordArchive(opened.value, host);
  if (!packed.ok) throw new Error(packed.problem.message);
  const again = await openArchive(sourceOf(packed.value), host);
  if (!again.ok) throw new Error(again.problem.message);
  expect(await reportOf(again.value, settings)).toEqual(report);
  return report;
}

const traffic = () => {
  const bus = new LineScript(6500, 5500, 700);
  return bus.write(0xa0, 0x12, 0x55).start().byte(0xa1).byte(0x5a).byte(0xc3, false).stop().wait(20_000).write(0x90, 0xaa, 0x0f);
};

type Recorded = Awaited<ReturnType<typeof recorded>>;
const median = (report: Recorded, symbol: string) =>
  (report.measurements.find((row) => row.parameter === symbol)?.p50_s ?? Number.NaN) * 1e9;
const share = (value: number, truth: number) => Math.abs(value / truth - 1);

const EIGHT_BITS = { step: 4 / 256, noise: 0.01 };

describe.each([
  ["2.2 kohm, 150 pF at 3.3 V", { vdd: 3.3, ohm: 2200, farad: 150e-12, driverOhm: 60 }, 20],
  ["4.7 kohm, 200 pF at 3.3 V", { vdd: 3.3, ohm: 4700, farad: 200e-12, driverOhm: 90 }, 40],
  ["1 kohm, 100 pF at 1.8 V", { vdd: 1.8, ohm: 1000, farad: 100e-12, driverOhm: 30 }, 10],
  ["3.3 kohm, 100 pF at 5 V", { vdd: 5, ohm: 3300, farad: 100e-12, driverOhm: 120 }, 20],
] as const)("%s, by an 8-bit converter with noise", (_, line, interval_ns) => {
  const converter = { ...EIGHT_BITS, step: (line.vdd * 1.2) / 256, interval_ns };

  test("tr within 2 % of 0.8473 RC, RC itself within 2 %", async () => {
    const report = await recorded(traffic(), line, converter);
    expect(report.capture.levels).toBe("volts");
    expect(report.transactions.map((one) => one.bytes.map((byte) => byte.value))).toEqual([
      [0x12, 0x55],
      [0x5a, 0xc3],
      [0xaa, 0x0f],
    ]);
    expect(share(median(report, "tr"), 0.8473 * rise(line))).toBeLessThan(0.02);
    expect(share((report.levels?.rc_s ?? 0) * 1e9, rise(line))).toBeLessThan(0.02);
  });

  test("levels within half a converter step plus the noise", async () => {
    const report = await recorded(traffic(), line, converter);
    const { levels, capture } = report;
    const near = converter.step / 2 + converter.noise;
    // VDD is the upper cluster of both lines, the last part of every slow rise included.
    expect(share(capture.vdd_v ?? 0, line.vdd)).toBeLessThan(0.01);
    expect(Math.abs((levels?.scl_low?.p50_v ?? 0) - settled(line))).toBeLessThan(near);
    expect(Math.abs((levels?.sda_low?.p50_v ?? 0) - settled(line))).toBeLessThan(near);
    expect(Math.abs((levels?.sda_high?.p50_v ?? 0) - line.vdd)).toBeLessThan(near);
  });
});

// REFERENCE 4.1: SMBus rise and fall run between VIL,MAX - 0.15 V and VIH,MIN + 0.15 V (BQ41Z50, TPS53676, E8870 data sheets).
describe.each([
  ["SMBus 2.0", 0.65, 2.25],
  ["SMBus 3 400 kHz", 0.65, 1.5],
] as const)("%s: tr from %d V to %d V", (limits, low, high) => {
  const truth = ({ vdd, ...line }: Line) => rise({ vdd, ...line }) * Math.log((vdd - low) / (vdd - high));

  test.each([3.3, 5])("at %d V, reckoned from 30 %% and 70 %%", async (vdd) => {
    const line = { vdd, ohm: 3300, farad: 100e-12, driverOhm: 60 };
    const report = await recorded(traffic(), line, { ...EIGHT_BITS, step: (vdd * 1.2) / 256, interval_ns: 20 }, {}, limits);
    expect(share(median(report, "tr"), truth(line))).toBeLessThan(0.02);
    expect(share((report.levels?.rc_s ?? 0) * 1e9, rise(line))).toBeLessThan(0.02);
    const points = report.measurements.find((row) => row.parameter === "tr")?.points ?? "";
    expect(points).toContain(`${low.toFixed(2)} V (VIL,MAX - 0.15 V) to ${high.toFixed(2)} V (VIH,MIN + 0.15 V)`);
    expect(points).toContain("reckoned from the crossings");
  });

  test("a supply that cannot reach them, and levels alone", () => {
    const profile = builtIn(limits);
    const scarce = edgePoints({ vdd_v: high - 0.01, vil_v: 0.4, vih_v: 1 }, profile);
    expect([scarce.rise, scarce.fall, scarce.words]).toEqual([1, 1, null]);
    const levels = edgePoints({ vdd_v: null, vil_v: null, vih_v: null }, profile);
    expect(levels).toMatchObject({
      rise: 1,
      words: { fall: expect.stringMatching(/MIN \+ 0\.15 V\) to 0\.65 V .*, SCL and SDA$/) },
    });
  });

  test("measured between them where these levels are given", async () => {
    const line = { vdd: 3.3, ohm: 3300, farad: 100e-12, driverOhm: 400 };
    const report = await recorded(traffic(), line, { ...EIGHT_BITS, interval_ns: 10 }, { vil_v: low, vih_v: high }, limits);
    expect(share(median(report, "tr"), truth(line))).toBeLessThan(0.02);
    const floor = settled(line);
    expect(share(median(report, "tf"), fall(line) * Math.log((high - floor) / (low - floor)))).toBeLessThan(0.02);
    expect(report.measurements.find((row) => row.parameter === "tr")?.points).not.toContain("reckoned");
  });
});
