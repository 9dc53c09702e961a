// Captures in volts: levels by hysteresis at VIL/VIH = 0.3/0.7 VDD (UM10204 table 9), crossings interpolated, VDD found from
// the two level clusters. Straight ramps make every expected instant exact arithmetic.

import { describe, expect, test } from "vitest";
import { readText, sampled, traffic } from "../support/csv";

const VDD = 3.3;
const INTERVAL = 100;

/** A straight ramp of `ramp` nanoseconds on each change, after an idle of `idle` frames of nothing. */
function volts(
  interval: number,
  ramp: number,
  low: { readonly scl: number; readonly sda: number },
  frames: readonly (readonly number[])[],
  idle = 0,
) {
  const steps = sampled(traffic(frames), interval);
  let v = VDD;
  let w = VDD;
  const rate = (VDD * interval) / ramp;
  const toward = (now: number, target: number) => (now < target ? Math.min(target, now + rate) : Math.max(target, now - rate));
  const rows: { at: number; v: number; w: number }[] = [];
  for (let i = 0; i < idle; i += 1) rows.push({ at: i * interval, v, w });
  for (const step of steps) {
    v = toward(v, step.scl === 1 ? VDD : low.scl);
    w = toward(w, step.sda === 1 ? VDD : low.sda);
    rows.push({ at: step.at + idle * interval, v, w });
  }
  return rows;
}

const csv = (rows: readonly { at: number; v: number; w: number }[], digits = 6) =>
  `Time [s],SCL [V],SDA [V]\n${rows.map((r) => `${(r.at * 1e-9).toFixed(9)},${r.v.toFixed(digits)},${r.w.toFixed(digits)}`).join("\n")}\n`;

const FRAMES = [
  [0xa0, 0x12],
  [0xa1, 0x34],
];

describe("comparator", () => {
  test("crossing instants and leads of straight ramps", async () => {
    const rows = volts(INTERVAL, 1000, { scl: 0, sda: 0 }, FRAMES);
    const read = await readText(csv(rows));
    expect(read.capture.head).toMatchObject({ levels: "volts", vdd_v: 3.3 });
    expect(read.capture.head.vil_v).toBeCloseTo(0.99, 9);
    expect(read.capture.head.vih_v).toBeCloseTo(2.31, 9);
    // SDA starts to fall with the sample at 20.0 us, from 3.3 V at 19.9 us, and passes VIL after 70 % of the 1 us ramp.
    expect(Math.abs(read.ticks[1] - (19_900_000 + 700_000))).toBeLessThanOrEqual(1);
    expect(read.lines[1]).toBe(1);
    const leads = read.blocks.flatMap((block) => [...(block.volts?.leadSda ?? [])]);
    // 70 % down to 30 % of a 1 us ramp.
    expect(leads[1]).toBeCloseTo(400_000, -1);
    const scl = read.blocks
      .flatMap((block) => [...(block.volts?.leadScl ?? [])])
      .filter((lead) => lead !== 0 && !Number.isNaN(lead));
    expect(scl.length).toBe(read.tail.sclEdges);
    for (const lead of scl) expect(Math.abs(lead - 400_000)).toBeLessThanOrEqual(2);
  });

  test("means are those of settled samples: each driver's own low", async () => {
    const read = await readText(csv(volts(50, 300, { scl: 0.12, sda: 0.31 }, FRAMES)));
    const block = read.blocks.map((one) => ({
      lines: [...one.lines],
      scl: [...(one.volts?.meanScl ?? [])],
      sda: [...(one.volts?.meanSda ?? [])],
    }));
    const means = block.flatMap((one) => one.lines.map((lines, i) => ({ lines, scl: one.scl[i], sda: one.sda[i] })));
    const lows = means.filter((one) => (one.lines & 1) === 0 && !Number.isNaN(one.scl)).map((one) => one.scl);
    expect(lows.length).toBeGreaterThan(20);
    for (const low of lows) expect(low).toBeCloseTo(0.12, 3);
    const data = means.filter((one) => (one.lines & 2) === 0 && !Number.isNaN(one.sda)).map((one) => one.sda);
    expect(data.length).toBeGreaterThan(20);
    for (const low of data) expect(low).toBeCloseTo(0.31, 3);
  });

  test("a dip that never reaches VIL is an excursion, not an edge", async () => {
    const rows = volts(INTERVAL, 300, { scl: 0, sda: 0 }, FRAMES);
    const plain = await readText(csv(rows));
    // 1.5 V for 300 ns on the idle SDA: falls past VIH, not past VIL.
    for (let i = 100; i < 103; i += 1) rows[i] = { ...rows[i], w: 1.5 };
    const read = await readText(csv(rows));
    expect(read.ticks).toEqual(plain.ticks);
    expect(read.tail.excursionCount).toBe(plain.tail.excursionCount + 1);
    const found = read.tail.excursions[0];
    expect(found).toMatchObject({ line: "sda", extreme_v: 1.5 });
    // Crosses 2.31 V at (3.3-2.31)/1.8 of a sample after sample 99 and again before sample 103.
    expect(found.tick).toBe(9_900_000 + 55_000);
    expect(found.width).toBe(300_000 + 100_000 - 2 * 55_000);
  });

  test("a dip that stays above VIH is kept as a graze, told from the beginning of a fall, and from steps of a low", async () => {
    const rows = volts(INTERVAL, 300, { scl: 0, sda: 0 }, FRAMES);
    const plain = await readText(csv(rows));
    expect(plain.tail.excursions).toEqual([]);
    // To 2.7 V for 300 ns on the idle SDA, and to 2.6 and 2.8 V on SCL.
    for (let i = 100; i < 103; i += 1) rows[i] = { ...rows[i], w: 2.7 };
    rows[150] = { ...rows[150], v: 2.6 };
    rows[151] = { ...rows[151], v: 2.8 };
    // A low that another driver takes over at 0.4 V for a while.
    const low = rows.findIndex((_, i) => i > 300 && rows.slice(i - 5, i + 15).every(({ v }) => v === 0));
    for (let i = low; i < low + 5; i += 1) rows[i] = { ...rows[i], v: 0.4 };
    const read = await readText(csv(rows));
    expect(read.ticks).toEqual(plain.ticks);
    expect(read.tail.excursionCount).toBe(0);
    expect(read.tail.excursions).toEqual([
      { line: "sda", tick: 10_000_000, width: 300_000, extreme_v: 2.7 },
      { line: "scl", tick: 15_000_000, width: 200_000, extreme_v: 2.6 },
    ]);
    // Rows that no form fits are read one by one, and say the same.
    const spaced = csv(rows).replaceAll(/^(.*),(.*),(.*)$/gm, (line, t, v, w) => (t.endsWith("3") ? `${t}, ${v} , ${w}` : line));
    expect((await readText(spaced)).tail.excursions).toEqual(read.tail.excursions);
  });

  test("given levels win: VDD, VIL, VIH", async () => {
    const text = csv(volts(INTERVAL, 1000, { scl: 0, sda: 0 }, FRAMES));
    const vdd = await readText(text, { vdd_v: 3 });
    expect(vdd.capture.head.vdd_v).toBe(3);
    expect(vdd.capture.head.vil_v).toBeCloseTo(0.9, 12);
    const own = await readText(text, { vil_v: 0.8, vih_v: 2 });
    expect(own.capture.head).toMatchObject({ vil_v: 0.8, vih_v: 2 });
    expect(own.ticks[1]).toBe(19_900_000 + Math.round((2.5 / 3.3) * 1_000_000));
  });

  test("a sample without a reading makes the line unknown until it is known again", async () => {
    const rows = volts(INTERVAL, 300, { scl: 0, sda: 0 }, FRAMES);
    const text = csv(rows).split("\n");
    text[51] = text[51].replace(/,[^,]*$/, ",---");
    const read = await readText(text.join("\n"));
    expect(read.lines.slice(0, 3)).toEqual([3, 1 | 8, 3]);
    expect(read.ticks.slice(1, 3)).toEqual([5_000_000, 5_100_000]);
  });
});

describe("survey", () => {
  test("a long idle at the start: the file is read until both levels were seen", async () => {
    const read = await readText(csv(volts(INTERVAL, 300, { scl: 0.1, sda: 0.1 }, FRAMES, 150_000)));
    expect(read.capture.head.vdd_v).toBeCloseTo(3.3, 3);
    expect(read.tail.sclEdges).toBe(76);
  });

  test("noise does not move the levels or make edges", async () => {
    let state = 7;
    const noise = () => {
      state = (Math.imul(state, 48_271) >>> 0) % 2_147_483_647;
      return ((state % 10_000) / 10_000 - 0.5) * 0.3;
    };
    const clean = volts(INTERVAL, 300, { scl: 0.1, sda: 0.1 }, FRAMES);
    const read = await readText(csv(clean.map((r) => ({ at: r.at, v: r.v + noise(), w: r.w + noise() }))));
    expect(read.tail.sclEdges).toBe(76);
    expect(read.capture.head.vdd_v ?? 0).toBeGreaterThan(3.2);
    expect(read.capture.head.vdd_v ?? 0).toBeLessThan(3.4);
  });

  test("AC-coupled or offset levels are said and still read", async () => {
    const rows = volts(INTERVAL, 300, { scl: 0, sda: 0 }, FRAMES).map((r) => ({ at: r.at, v: r.v - 1.65, w: r.w - 1.65 }));
    const read = await readText(csv(rows));
    expect(read.capture.head.warnings.map((warning) => warning.code)).toContain("levels-offset");
    expect(read.tail.sclEdges).toBe(76);
  });

  test("rows lost in the middle reset both comparators", async () => {
    const lines = csv(volts(INTERVAL, 300, { scl: 0, sda: 0 }, FRAMES)).split("\n");
    lines.splice(500, 200);
    const read = await readText(lines.join("\n"));
    expect(read.tail.warnings).toEqual([expect.objectContaining({ code: "rows-lost", line: 501, count: 1 })]);
    expect(read.lines.filter((one) => (one & 16) !== 0)).toHaveLength(1);
  });
});
