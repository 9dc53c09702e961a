import { describe, expect, test } from "vitest";
import { biasNs, RISE_FROM_HALF, RISE_TO_HALF } from "@/lib/limits/bias";
import { createMeasurement, type MeasureHead } from "@/lib/limits/measure";
import { builtIn, derive, type LimitTable, type Profile, type ProfileName } from "@/lib/limits/profile";
import { type MeasurementRow, measurementRows } from "@/lib/limits/rows";
import { cumulativeStretch, type Stretched } from "@/lib/limits/stretching";
import { BitTrain, type Intervals } from "../support/bit-train";

// One tick is a picosecond; change times, so every interval is exact.
const EXACT: MeasureHead = { timebase: { ticksPerSecond: 1e12, origin: "file" }, levels: "digital", sampleTicks: null };
const VOLTS: MeasureHead = { ...EXACT, levels: "volts" };
const PS = 1000;

function rowsOf(train: BitTrain, profile: Profile, head: MeasureHead = EXACT): MeasurementRow[] {
  const volts = head.levels === "volts";
  const measurement = createMeasurement(head, [profile], profile.hs);
  measurement.bits(train.block(volts));
  return measurementRows(measurement.measured, { profile, index: 0 }, volts);
}

function row(rows: readonly MeasurementRow[], symbol: string, traffic: "F/S" | "Hs" = "F/S"): MeasurementRow {
  const found = rows.find((candidate) => candidate.symbol === symbol && candidate.traffic === traffic);
  if (found === undefined) throw new Error(`no row for ${symbol}`);
  return found;
}

/** Intervals well inside every limit of a table, ticks. */
function comfortable(table: LimitTable): Intervals {
  const ns = (symbol: string) => table[symbol]?.min ?? 0;
  const hz = (table.fSCL ?? table.fSMB ?? table.fSCLH).max ?? 1;
  const slack = 1e9 / hz - ns("tLOW") - ns("tHIGH");
  const valid = Math.min(table["tVD;DAT"]?.max ?? 1e9, table["tHD;DAT"]?.max ?? 1e9, ns("tLOW") - ns("tSU;DAT"));
  return {
    low: Math.ceil((ns("tLOW") + slack) * PS),
    high: Math.ceil((ns("tHIGH") + slack) * PS),
    hdSta: ns("tHD;STA") * 2 * PS,
    suSta: (ns("tSU;STA") + 100) * 2 * PS,
    suSto: ns("tSU;STO") * 2 * PS,
    buf: 1_000_000 * PS,
    hold: (ns("tHD;DAT") + valid) * 0.5 * PS,
    valid: (ns("tHD;DAT") + valid) * 0.5 * PS,
  };
}

/** How to give one bus the interval `v` of one parameter, all others comfortable. */
type Inject = (train: BitTrain, v: number, usual: Intervals) => void;
const whole = (train: BitTrain) => train.byte().repeated().byte().stop().start().byte().stop();
const INJECT: Record<string, Inject> = {
  fSCL: (t, v, u) => whole(t.start().bit(1, { high: v - u.low })),
  fSMB: (t, v, u) => whole(t.start().bit(1, { high: v - u.low })),
  tLOW: (t, v) => whole(t.start().bit(1, { low: v, hold: v / 4, valid: v / 4 })),
  tHIGH: (t, v) => whole(t.start().bit(1, { high: v })),
  "tHD;STA": (t, v) => whole(t.start({ hdSta: v })),
  "tSU;STA": (t, v) => t.start().byte().repeated({ suSta: v }).byte().stop(),
  "tSU;STO": (t, v) => t.start().byte().stop({ suSto: v }).start().byte().stop(),
  tBUF: (t, v) => t.start().byte().stop({ buf: v }).start().byte().stop(),
  "tSU;DAT": (t, v, u) => whole(t.start().bit(1, { hold: u.low - v, valid: u.low - v, low: u.low })),
  "tHD;DAT": (t, v, u) => whole(t.start().bit(1, { hold: v, valid: Math.max(v, u.valid) })),
  "tVD;DAT": (t, v, u) => whole(t.start().bit(1, { valid: v, low: Math.max(u.low, v + 1000 * PS) })),
  "tVD;ACK": (t, v) => t.start().byte({ valid: v }, 8).byte().stop(),
};

const MODES: readonly ProfileName[] = [
  "Standard-mode",
  "Fast-mode",
  "Fast-mode Plus",
  "SMBus 2.0",
  "SMBus 3 100 kHz",
  "SMBus 3 400 kHz",
  "SMBus 3 1 MHz",
];
// The least period of fSCL is shorter than the comfortable low and high together need, so it is given its own test below.
const MINIMA = ["tLOW", "tHIGH", "tHD;STA", "tSU;STA", "tSU;STO", "tBUF", "tSU;DAT", "tHD;DAT"];

describe.each(MODES)("one tick either side of each limit, %s", (name) => {
  const profile = builtIn(name);
  const usual = comfortable(profile.limits);
  const measured = (symbol: string, v: number, head: MeasureHead = EXACT) => {
    const train = new BitTrain(usual, 5);
    INJECT[symbol](train, v, usual);
    return row(rowsOf(train, profile, head), symbol);
  };
  const least = MINIMA.filter((symbol) => (profile.limits[symbol].min ?? 0) > 0);

  test.each(least)("%s at least, in volts", (symbol) => {
    const limit = (profile.limits[symbol].min ?? 0) * PS;
    expect(measured(symbol, limit, VOLTS)).toMatchObject({ below: 0, above: 0, uncertain: 0, unproven: 0, verdict: "pass" });
    expect(measured(symbol, limit + 1, VOLTS)).toMatchObject({ below: 0, verdict: "pass", bias: 0 });
    expect(measured(symbol, limit - 1, VOLTS)).toMatchObject({ below: 1, above: 0, uncertain: 0, verdict: "fail" });
  });

  // A value on the limit is counted on neither side; what one threshold shows of it is no proof.
  test.each(least)("%s at least, in levels", (symbol) => {
    const limit = (profile.limits[symbol].min ?? 0) * PS;
    const hidden = Math.ceil(biasNs(symbol, profile.limits) * PS);
    expect(measured(symbol, limit)).toMatchObject({ below: 0, above: 0, uncertain: 0, unproven: 1, verdict: "too-close" });
    expect(measured(symbol, limit + hidden - 1)).toMatchObject({ below: 0, uncertain: 0, unproven: 1, verdict: "too-close" });
    expect(measured(symbol, limit + hidden)).toMatchObject({ below: 0, unproven: 0, verdict: "pass" });
    const broken = measured(symbol, limit - 1);
    expect(broken).toMatchObject({ below: 1, above: 0, uncertain: 0, unproven: 0, verdict: "fail" });
    expect(broken.violations).toHaveLength(1);
    expect(broken.violations[0]).toMatchObject({ side: "min", limit: limit / 1e12, measured: (limit - 1) / 1e12 });
  });

  test("the shortest period", () => {
    const symbol = profile.spec === "SMBus" ? "fSMB" : "fSCL";
    const limit = 1e12 / (profile.limits[symbol].max ?? 1);
    const tight = (v: number) => {
      const low = usual.low - Math.floor((usual.low + usual.high - limit) / 2);
      const train = new BitTrain({ ...usual, low, high: usual.high });
      whole(train.start().bit(1, { high: v - low }));
      return row(rowsOf(train, profile), symbol);
    };
    expect(tight(limit)).toMatchObject({ below: 0, uncertain: 0 });
    expect(tight(limit - 1)).toMatchObject({ below: 1, verdict: "fail" });
  });

  test.each(["tVD;DAT", "tVD;ACK", "tHIGH", "fSMB"].filter((symbol) => (profile.limits[symbol]?.max ?? null) !== null))(
    "%s at most",
    (symbol) => {
      const limit = symbol === "fSMB" ? 1e12 / (profile.limits[symbol].min ?? 1) : (profile.limits[symbol].max ?? 0) * PS;
      expect(measured(symbol, limit)).toMatchObject({ above: 0, uncertain: 0, verdict: "pass" });
      expect(measured(symbol, limit - 1)).toMatchObject({ above: 0 });
      expect(measured(symbol, limit + 1)).toMatchObject({ above: 1, verdict: "fail" });
    },
  );

  test.each(["tr", "tf"])("%s at most, in volts", (symbol) => {
    const limit = (profile.limits[symbol].max ?? 0) * PS;
    const shaped = (v: number) => {
      const train = new BitTrain({ ...usual, low: usual.low + 2_000 * PS, high: usual.high + 2_000 * PS });
      const leads = symbol === "tr" ? { rise: v } : { end: v };
      train.start().bit(1, {}, leads).byte().stop();
      return row(rowsOf(train, profile, VOLTS), symbol);
    };
    expect(shaped(limit)).toMatchObject({ count: 1, above: 0, verdict: "pass" });
    // Leads are single precision, whose step at 300 000 ps is a thirty-second of a picosecond.
    expect(shaped(limit + 1)).toMatchObject({ above: 1, verdict: "fail" });
  });
});

describe("the bias of one threshold", () => {
  const { limits } = builtIn("Standard-mode");

  // REFERENCE 7, derived from UM10204 7.1: 39.7 % and 60.3 % of tr; 397 ns and 603 ns with tr 1000 ns.
  test("a rise of 1000 ns crosses the half 397 ns after 30 % and 603 ns before 70 %", () => {
    expect(RISE_TO_HALF * 1000).toBeCloseTo(397, 0);
    expect(RISE_FROM_HALF * 1000).toBeCloseTo(603, 0);
  });

  // REFERENCE 7: tLOW by up to 0.397 tr + 0.5 tf, tHIGH by up to 0.603 tr + 0.5 tf, tSU;DAT after a rising SDA by up to 1.0 tr.
  test.each([
    ["tLOW", 397 + 150],
    ["tHIGH", 603 + 150],
    ["tSU;DAT", 1000],
    ["tHD;STA", 300],
    ["tSU;STO", 1000],
    ["fSCL", 0],
    ["tVD;DAT", 0],
  ])("%s in Standard-mode: %d ns", (symbol, ns) => {
    expect(biasNs(symbol, limits)).toBeCloseTo(ns, 0);
  });

  test("a profile with the bus's own edges puts fewer passes in doubt", () => {
    const sharp = { ...limits, tr: { ...limits.tr, max: 100 }, tf: { ...limits.tf, max: 20 } };
    expect(biasNs("tLOW", sharp)).toBeCloseTo(39.7 + 10, 0);
  });

  test("sampling and threshold add up, and what the sampling leaves open is counted there", () => {
    const profile = builtIn("Standard-mode");
    const sampled: MeasureHead = { ...EXACT, sampleTicks: 100 * PS };
    const low = (ns: number) =>
      row(
        rowsOf(whole(new BitTrain(comfortable(limits)).start().bit(1, { low: ns * PS, hold: 0, valid: 0 })), profile, sampled),
        "tLOW",
      );
    expect(low(4700)).toMatchObject({ uncertain: 1, unproven: 0, verdict: "too-close" });
    expect(low(5300)).toMatchObject({ uncertain: 0, unproven: 1, verdict: "too-close" });
    expect(low(5400)).toMatchObject({ uncertain: 0, unproven: 0, verdict: "pass" });
  });
});

describe("SMBus time-outs", () => {
  const profile = builtIn("SMBus 2.0");
  const usual = comfortable(profile.limits);
  test.each([
    [35e9, 0],
    [35e9 + 1, 1],
  ])("a low of %d ps", (low, above) => {
    const train = whole(new BitTrain(usual).start().bit(1, { low }));
    expect(row(rowsOf(train, profile), "tTIMEOUT")).toMatchObject({ above });
  });

  // RM0440 39.4.12, LM5066 notes: targets from START to STOP, 25 ms; the controller within one byte, 10 ms.
  const PER_S = EXACT.timebase.ticksPerSecond;
  const stretch = (by: "target" | "controller", transaction: number, byte: number, excess: number): Stretched => ({
    transaction,
    byte,
    start_s: 0.1 * transaction + 0.01 * byte,
    excess_s: excess / PER_S,
    by,
  });
  const summed = (list: Stretched[]) => {
    const { sext, mext } = cumulativeStretch(list, (n) => n - (n % 2), profile.limits, EXACT.timebase, 0);
    return [sext.judgeOf(0)?.above, mext.judgeOf(0)?.above, sext.count, mext.count];
  };

  test.each([
    [25e9, 0],
    [25e9 + 1, 1],
  ])("stretching by targets of %d ps from START to STOP, repeated START included", (ps, above) => {
    const list = [stretch("target", 0, 1, 9e9), stretch("target", 0, 2, 9e9), stretch("target", 1, 0, ps - 18e9)];
    expect(summed(list)).toEqual([above, 0, 1, 0]);
    expect(summed([...list.slice(0, 2), stretch("target", 2, 0, ps - 18e9)])).toEqual([0, 0, 2, 0]);
  });

  test.each([
    [10e9, 0],
    [10e9 + 1, 1],
  ])("stretching by the controller of %d ps within one byte", (ps, above) => {
    expect(summed([stretch("controller", 0, 1, 4e9), stretch("controller", 0, 1, ps - 4e9)])).toEqual([0, above, 0, 1]);
    expect(summed([stretch("controller", 0, 1, 4e9), stretch("controller", 0, 2, ps - 4e9)])).toEqual([0, 0, 0, 2]);
  });
});

describe.each([100, 250, 400])("one tick either side of each limit, High-speed at %d pF", (pf) => {
  const profile = builtIn("High-speed", pf);
  const usual = comfortable(builtIn("Fast-mode").limits);
  const fast = comfortable(profile.hs);
  const ps = (symbol: string, side: "min" | "max") => Math.round((profile.hs[symbol][side] ?? 0) * PS);

  interface Change {
    bit?: Partial<Intervals>;
    /** Leads of a zero, of a one, and of the first rise after the acknowledge. */
    leads?: { rise?: number; end?: number; sdaFall?: number; sdaRise?: number; first?: number };
    repeated?: Partial<Intervals>;
    stop?: Partial<Intervals>;
  }

  function hs({ bit = {}, leads = {}, repeated = {}, stop = {} }: Change, head = VOLTS): MeasurementRow[] {
    const train = new BitTrain(usual).start().byte();
    train.hs = true;
    train.repeated({ ...fast, ...repeated });
    for (let slot = 0; slot < 9; slot++) train.bit(1, fast);
    train.bit(1, fast, { rise: leads.first ?? 0 });
    train.bit(0, { ...fast, ...bit }, { rise: leads.rise ?? 0, end: leads.end ?? 0, sdaLast: leads.sdaFall ?? 0 });
    train.bit(1, fast, { sdaLast: leads.sdaRise ?? 0 });
    for (let slot = 3; slot < 9; slot++) train.bit(1, fast);
    train.repeated(fast);
    for (let slot = 0; slot < 9; slot++) train.bit(1, fast);
    train.stop({ low: fast.low, suSto: fast.suSto, ...stop });
    train.hs = false;
    return rowsOf(train.start().byte().stop(), profile, head);
  }

  test("limits switch in after the controller code and out at STOP", () => {
    const rows = hs({}, EXACT);
    expect(row(rows, "tLOW", "Hs").limitMin).toBeCloseTo(ps("tLOW", "min") / 1e12, 15);
    expect(row(rows, "tLOW", "F/S")).toMatchObject({ limitMin: 1300e-9, below: 0, count: 18 + 1 });
    expect(row(rows, "tBUF", "F/S")).toMatchObject({ count: 1, below: 0, limitMin: 1300e-9 });
    // High-speed is the profile asked for, so its rows come first.
    expect(rows[0].traffic).toBe("Hs");
  });

  test("nothing comfortable breaks a limit", () => {
    for (const found of hs({})) expect([found.symbol, found.below, found.above]).toEqual([found.symbol, 0, 0]);
  });

  const LEAST: Record<string, (v: number) => Change> = {
    tLOW: (low) => ({ bit: { low, hold: low / 4, valid: low / 4 } }),
    tHIGH: (high) => ({ bit: { high } }),
    "tSU;DAT": (v) => ({ bit: { hold: fast.low - v, valid: fast.low - v } }),
    "tSU;STA": (suSta) => ({ repeated: { suSta } }),
    "tHD;STA": (hdSta) => ({ repeated: { hdSta } }),
    "tSU;STO": (suSto) => ({ stop: { suSto } }),
    fSCLH: (period) => ({ bit: { low: fast.low, high: period - fast.low } }),
  };
  test.each(Object.keys(LEAST))("%s at least", (symbol) => {
    const limit = symbol === "fSCLH" ? Math.ceil(1e12 / (profile.hs.fSCLH.max ?? 1)) : ps(symbol, "min");
    const below = (v: number) => row(hs(LEAST[symbol](v)), symbol, "Hs").below;
    expect([below(limit + 1), below(limit), below(limit - 1)]).toEqual([0, 0, 1]);
  });

  const MOST: Record<string, (v: number) => Change> = {
    "tHD;DAT": (hold) => ({ bit: { hold, valid: hold, low: hold + 2 * fast.low } }),
    trCL: (rise) => ({ leads: { rise }, bit: { low: fast.low + 1_000_000 } }),
    trCL1: (first) => ({ leads: { first } }),
    tfCL: (end) => ({ leads: { end }, bit: { high: fast.high + 1_000_000 } }),
    trDA: (sdaRise) => ({ leads: { sdaRise } }),
    tfDA: (sdaFall) => ({ leads: { sdaFall } }),
  };
  test.each(Object.keys(MOST))("%s at most", (symbol) => {
    const limit = ps(symbol, "max");
    const above = (v: number) => row(hs(MOST[symbol](v)), symbol, "Hs").above;
    expect([above(limit - 1), above(limit), above(limit + 1)]).toEqual([0, 0, 1]);
  });
});

test("a team's own Hs limit judges the Hs traffic of its profile", () => {
  const base = builtIn("High-speed", 100);
  const own = derive(base, "Fast line", 2, { "tLOW (Hs)": { min: 900 } });
  const fast = comfortable(base.hs);
  const train = new BitTrain(comfortable(builtIn("Fast-mode").limits)).start().byte();
  train.hs = true;
  train
    .repeated(fast)
    .byte({ ...fast })
    .stop();
  train.hs = false;
  const rows = rowsOf(train, own);
  expect(rows[0].traffic).toBe("Hs");
  expect(row(rows, "tLOW", "Hs")).toMatchObject({ limitMin: 900e-9, clause: "Fast line version 2", verdict: "fail" });
  expect(row(rows, "tLOW", "F/S")).toMatchObject({ limitMin: 1300e-9, below: 0 });
});

describe("sampling uncertainty", () => {
  const profile = builtIn("Standard-mode");
  const usual = comfortable(profile.limits);
  const sampled: MeasureHead = { ...EXACT, sampleTicks: 100 * PS };
  const low = (v: number) =>
    row(rowsOf(whole(new BitTrain(usual).start().bit(1, { low: v, hold: 0, valid: 0 })), profile, sampled), "tLOW");

  test.each([
    [4600, { below: 1, uncertain: 0 }],
    [4700, { below: 0, uncertain: 1 }],
    [4800, { below: 0, uncertain: 0 }],
  ])("tLOW of %d ns at 100 ns a sample", (ns, expected) => {
    expect(low(ns * PS)).toMatchObject(expected);
  });

  test("a limit that the sampling cannot judge says which rate would", () => {
    const slow: MeasureHead = { ...EXACT, sampleTicks: 1000 * PS };
    const rows = rowsOf(whole(new BitTrain(usual).start()), profile, slow);
    expect(row(rows, "tSU;DAT").needsRate).toBeCloseTo(10 / 250e-9, 3);
    expect(row(rows, "tBUF").needsRate).toBeNull();
  });

  test("edges of a logic-level capture cannot be measured", () => {
    const rows = rowsOf(whole(new BitTrain(usual).start()), profile);
    expect(row(rows, "tr")).toMatchObject({ count: 0, verdict: "not-measurable", min: null });
    expect(row(rows, "tf").note).toContain("record volts");
  });
});

test("a stretched low is not judged for tVD, its neighbours are", () => {
  const profile = builtIn("Standard-mode");
  const usual = comfortable(profile.limits);
  const late = { valid: 20_000 * PS, low: 30_000 * PS };
  const rows = rowsOf(new BitTrain(usual).start().byte().byte(late, 0).stop(), profile);
  expect(row(rows, "tVD;DAT")).toMatchObject({ count: 15, above: 0 });
  expect(row(rows, "tSU;DAT").count).toBe(18);
});

test("quantiles of a long capture stay within a sixty-fourth of an octave, and extremes are exact with their places", () => {
  const profile = builtIn("Standard-mode");
  const usual = comfortable(profile.limits);
  const measurement = createMeasurement(EXACT, [profile], profile.hs);
  const train = new BitTrain(usual).start();
  const lows: number[] = [];
  for (let i = 0; i < 9_000; i++) {
    const low = usual.low + ((i * 7919) % 9000) * PS;
    lows.push(low);
    train.bit(1, { low });
  }
  measurement.bits(train.block());
  const found = row(measurementRows(measurement.measured, { profile, index: 0 }, false), "tLOW");
  lows.sort((a, b) => a - b);
  expect(found.count).toBe(9000);
  expect(found.min).toBe(lows[0] / 1e12);
  expect(found.max).toBe(lows[8999] / 1e12);
  const median = lows[4499] / 1e12;
  expect(Math.abs((found.p50 ?? 0) - median) / median).toBeLessThan(1 / 64);
  expect(found.smallest).toMatchObject({ transaction: 0, measured: lows[0] / 1e12 });
  expect(found.distribution.reduce((sum, [, n]) => sum + n, 0)).toBe(9000);
});
