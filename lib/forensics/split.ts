// In: one group of messages. Out: two, if it is plainly two: no single message tells them apart, but all figures of many do.
// Two-component normal mixture with known errors (EM), accepted by the Bayesian information criterion (Schwarz, 1978) and only
// when the halves stand so far apart that a slow drift of one clock cannot pass for two (a uniform spread gives 3.5).

import { bias, F_FALL, F_HIGH, F_LOW, F_PERIOD, F_RISE, F_SDA_LEVEL, type Features, variance } from "./features";

/** Told apart by the clock's two intervals, or by their sum, which coarse sampling shows more sharply. */
const BY_INTERVALS = [F_LOW, F_HIGH, F_FALL, F_RISE, F_SDA_LEVEL] as const;
const BY_PERIOD = [F_PERIOD, F_FALL, F_RISE, F_SDA_LEVEL] as const;
const FAR = 4.2;
const LEAST = 3;
const ROUNDS = 25;

interface Table {
  /** x[f][i], error variance v[f][i]; NaN where not shown. */
  readonly x: readonly Float64Array[];
  readonly v: readonly Float64Array[];
  /** Typical rounding that a whole message shares, per figure. */
  readonly bias: readonly number[];
  readonly n: number;
}

/** Splits until nothing more is plainly two. */
export function splitGroups(
  features: Features,
  groups: readonly (readonly number[])[],
  grain: (f: number, x: number) => number,
): number[][] {
  const out: number[][] = [];
  const queue = groups.map((g) => [...g]);
  while (queue.length > 0) {
    const members = queue.pop() ?? [];
    const room = out.length + queue.length < 12;
    const halves = room ? (split(features, members, grain, BY_INTERVALS) ?? split(features, members, grain, BY_PERIOD)) : null;
    if (halves === null) out.push(members);
    else queue.push(...halves);
  }
  return out.sort((a, b) => b.length - a.length);
}

function split(
  features: Features,
  members: readonly number[],
  grain: (f: number, x: number) => number,
  by: readonly number[],
): [number[], number[]] | null {
  if (members.length < 2 * LEAST + 2) return null;
  const table = tableOf(features, members, grain, by);
  let weight = start(table);
  let means = estimate(table, weight);
  for (let round = 0; round < ROUNDS; round++) {
    weight = expect(table, means);
    means = estimate(table, weight);
  }
  const first = members.filter((_, i) => weight[i] >= 0.5);
  const second = members.filter((_, i) => weight[i] < 0.5);
  if (Math.min(first.length, second.length) < LEAST) return null;
  const inflation = excess(table, weight, means);
  if (apart(table, means, inflation) < FAR) return null;
  // Each explanation may be as wide as it needs: one wide crowd is not two narrow ones.
  const all = new Float64Array(table.n).fill(1);
  const whole = { ...estimate(table, all), share: 1 };
  const gain = likelihood(table, means, inflation) - likelihood(table, whole, excess(table, all, whole));
  return 2 * gain > (by.length + 1) * Math.log(table.n) + 10 ? [first, second] : null;
}

function tableOf(
  features: Features,
  members: readonly number[],
  grain: (f: number, x: number) => number,
  by: readonly number[],
): Table {
  const column = (of: (f: number, i: number) => number): Float64Array[] =>
    by.map((f) => Float64Array.from(members, (i) => of(f, i)));
  return {
    n: members.length,
    bias: by.map((f) => members.reduce((sum, i) => sum + bias(features, f, i), 0) / members.length),
    x: column((f, i) => (features.count[f][i] > 0 ? features.value[f][i] : Number.NaN)),
    v: column((f, i) => variance(features, f, i) + bias(features, f, i) ** 2 / 6 + grain(f, features.value[f][i]) ** 2),
  };
}

/** First guess: by the sign along the direction of greatest spread, in units of error. */
function start(table: Table): Float64Array {
  const { n } = table;
  const z = table.x.map((x, f) => {
    const shown = [...x.keys()].filter((i) => !Number.isNaN(x[i]));
    const mean = shown.reduce((s, i) => s + x[i], 0) / Math.max(1, shown.length);
    return Float64Array.from(x, (value, i) => (Number.isNaN(value) ? 0 : (value - mean) / Math.sqrt(table.v[f][i])));
  });
  let direction = z.map((column) => column.reduce((s, value) => s + value * value, 0));
  const along = (i: number): number => z.reduce((s, column, f) => s + column[i] * direction[f], 0);
  for (let round = 0; round < 20; round++) {
    const next = z.map((column) => {
      let sum = 0;
      for (let i = 0; i < n; i++) sum += column[i] * along(i);
      return sum;
    });
    const length = Math.hypot(...next) || 1;
    direction = next.map((value) => value / length);
  }
  const score = Float64Array.from({ length: n }, (_, i) => along(i));
  const cut = bestCut(score);
  return score.map((value) => (value > cut ? 1 : 0));
}

/** Cut of a list in two that leaves the least variance within. */
function bestCut(score: Float64Array): number {
  const sorted = score.slice().sort();
  const n = sorted.length;
  const total = sorted.reduce((a, b) => a + b, 0);
  let left = 0;
  let best = -1;
  let cut = 0;
  for (let i = 0; i + 1 < n; i++) {
    left += sorted[i];
    const a = left / (i + 1);
    const b = (total - left) / (n - i - 1);
    const between = ((i + 1) * (n - i - 1) * (a - b) ** 2) / n;
    if (between <= best) continue;
    best = between;
    cut = (sorted[i] + sorted[i + 1]) / 2;
  }
  return cut;
}

interface Means {
  readonly one: readonly number[];
  readonly two: readonly number[];
  readonly share: number;
}

function estimate(table: Table, weight: Float64Array): Means {
  const mean = (w: (i: number) => number): number[] =>
    table.x.map((x, f) => {
      let sum = 0;
      let total = 0;
      for (let i = 0; i < table.n; i++) {
        if (Number.isNaN(x[i])) continue;
        const k = w(i) / table.v[f][i];
        total += k;
        sum += k * x[i];
      }
      return total > 0 ? sum / total : Number.NaN;
    });
  const share = weight.reduce((a, b) => a + b, 0) / table.n;
  return { one: mean((i) => weight[i]), two: mean((i) => 1 - weight[i]), share: Math.min(Math.max(share, 1e-3), 1 - 1e-3) };
}

function density(table: Table, i: number, mean: readonly number[], inflation: readonly number[] | null): number {
  let log = 0;
  for (let f = 0; f < mean.length; f++) {
    const x = table.x[f][i];
    if (Number.isNaN(x) || Number.isNaN(mean[f])) continue;
    const v = table.v[f][i] * (inflation === null ? 1 : inflation[f]);
    log -= 0.5 * Math.log(v) + (x - mean[f]) ** 2 / (2 * v);
  }
  return log;
}

function expect(table: Table, means: Means): Float64Array {
  return Float64Array.from({ length: table.n }, (_, i) => {
    const a = Math.log(means.share) + density(table, i, means.one, null);
    const b = Math.log(1 - means.share) + density(table, i, means.two, null);
    return 1 / (1 + Math.exp(b - a));
  });
}

/** How much wider the halves really are than their errors say, per figure, at least 1. */
function excess(table: Table, weight: Float64Array, means: Means): number[] {
  return table.x.map((x, f) => {
    let sum = 0;
    let n = 0;
    for (let i = 0; i < table.n; i++) {
      const mean = weight[i] >= 0.5 ? means.one[f] : means.two[f];
      if (Number.isNaN(x[i]) || Number.isNaN(mean)) continue;
      sum += Math.min((x[i] - mean) ** 2 / table.v[f][i], 25);
      n++;
    }
    return Math.max(1, n > 2 ? sum / (n - 2) : 1);
  });
}

function apart(table: Table, means: Means, inflation: readonly number[]): number {
  let square = 0;
  for (let f = 0; f < means.one.length; f++) {
    if (Number.isNaN(means.one[f]) || Number.isNaN(means.two[f])) continue;
    const typical = table.v[f].slice().sort()[table.n >> 1] * inflation[f];
    square += Math.max(0, Math.abs(means.one[f] - means.two[f]) - table.bias[f]) ** 2 / typical;
  }
  return Math.sqrt(square);
}

function likelihood(table: Table, means: Means, inflation: readonly number[]): number {
  let sum = 0;
  for (let i = 0; i < table.n; i++) {
    const a = Math.log(means.share) + density(table, i, means.one, inflation);
    if (means.share === 1) {
      sum += a;
      continue;
    }
    const b = Math.log(1 - means.share) + density(table, i, means.two, inflation);
    const top = Math.max(a, b);
    sum += top + Math.log(Math.exp(a - top) + Math.exp(b - top));
  }
  return sum;
}
