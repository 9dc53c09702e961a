// In: features of messages. Out: groups of messages that one controller each can have made, their number not known beforehand.
// Density clustering (DBSCAN: Ester, Kriegel, Sander, Xu, 1996; from memory) in units of each figure's own uncertainty, then
// what is not a controller is taken out: groups that are the longest-low, shortest-high mixture of two others (contests), and
// groups that differ only by a longer low.

import { bias, F_FALL, F_HIGH, F_LOW, F_PERIOD, F_RISE, F_SDA_LEVEL, type Features, variance } from "./features";
import { splitGroups } from "./split";

/** Not the level of SCL: a target that stretches pulls it lower too. */
const TOLD_BY = [F_LOW, F_HIGH, F_FALL, F_RISE, F_SDA_LEVEL, F_PERIOD] as const;
/** Two messages are neighbours when no figure differs by more than this many standard errors. */
const NEAR = 4.5;
/** Figures nearer than this share of themselves are never told apart, whatever the statistics say: timers drift. */
const GRAIN = 4e-4;
const GRAIN_V = 0.004;
/** Groups nearer than this, in errors of one message, are one. */
const PLAIN = 4;

export interface Group {
  /** Indices into the features. */
  readonly members: readonly number[];
  /** Mean of each figure, NaN where none shows it. */
  readonly mean: Float64Array;
  readonly error: Float64Array;
  /** Error of one message's figure. */
  readonly typical: Float64Array;
  /** What rounding alone may put between two messages: see `bias` of the features. */
  readonly bias: Float64Array;
  /** Mean number of lows inside bytes that a message shows. */
  readonly length: number;
}

export function clusters(features: Features): Group[] {
  const n = features.messages.length;
  const usable: number[] = [];
  for (let i = 0; i < n; i++) {
    if (features.even[i] === 1 && features.count[F_LOW][i] >= 4 && features.count[F_HIGH][i] >= 4) usable.push(i);
  }
  // A message that does not show every figure could pass for a neighbour of two different controllers.
  const shows = (f: number) => (i: number) => features.count[f][i] > 0;
  const complete = usable.filter(shows(F_FALL)).filter(shows(F_RISE));
  const crowds = dense(features, 2 * complete.length >= usable.length ? complete : usable);
  const groups = splitGroups(features, crowds, grain).map((members) => summary(features, members));
  return withoutMixtures(features, groups);
}

function grain(f: number, value: number): number {
  return f === F_SDA_LEVEL ? GRAIN_V : GRAIN * value;
}

/** Largest difference of two messages in standard errors. */
function distance(features: Features, i: number, j: number): number {
  let worst = 0;
  for (const f of TOLD_BY) {
    const a = features.value[f][i];
    const b = features.value[f][j];
    if (Number.isNaN(a) || Number.isNaN(b)) continue;
    const g = grain(f, a);
    const far = Math.max(0, Math.abs(a - b) - Math.max(bias(features, f, i), bias(features, f, j)));
    const d = far / Math.sqrt(variance(features, f, i) + variance(features, f, j) + g * g);
    if (d > worst) {
      worst = d;
      if (worst > NEAR) break;
    }
  }
  return worst;
}

function dense(features: Features, usable: readonly number[]): number[][] {
  const n = usable.length;
  const near: number[][] = Array.from({ length: n }, () => []);
  for (let a = 0; a < n; a++) {
    for (let b = a + 1; b < n; b++) {
      if (distance(features, usable[a], usable[b]) > NEAR) continue;
      near[a].push(b);
      near[b].push(a);
    }
  }
  const enough = n > 40 ? 3 : n > 8 ? 2 : 1;
  const label = new Int32Array(n).fill(-1);
  const out: number[][] = [];
  for (let a = 0; a < n; a++) {
    if (label[a] >= 0 || near[a].length < enough) continue;
    const members = [a];
    label[a] = out.length;
    for (let k = 0; k < members.length; k++) {
      if (near[members[k]].length < enough) continue;
      for (const b of near[members[k]]) {
        if (label[b] >= 0) continue;
        label[b] = out.length;
        members.push(b);
      }
    }
    out.push(members.map((i) => usable[i]));
  }
  // Rare controllers: what is left, alone or in pairs, and far from everything.
  for (let a = 0; a < n; a++) {
    if (label[a] >= 0) continue;
    label[a] = out.length;
    const members = [a, ...near[a].filter((b) => label[b] < 0)];
    for (const b of members) label[b] = out.length;
    out.push(members.map((i) => usable[i]));
  }
  return out.sort((x, y) => y.length - x.length);
}

function summary(features: Features, members: readonly number[]): Group {
  const mean = new Float64Array(features.value.length).fill(Number.NaN);
  const error = new Float64Array(features.value.length).fill(Number.NaN);
  const typical = new Float64Array(features.value.length).fill(Number.NaN);
  const rounding = new Float64Array(features.value.length);
  for (let f = 0; f < mean.length; f++) {
    let weight = 0;
    let sum = 0;
    for (const i of members) {
      const x = features.value[f][i];
      if (Number.isNaN(x)) continue;
      weight += features.count[f][i];
      sum += features.count[f][i] * x;
    }
    if (weight === 0) continue;
    mean[f] = sum / weight;
    for (const i of members) rounding[f] += bias(features, f, i) / members.length;
    // Rounded at a phase of its own, each message is off by up to half the bound either way.
    error[f] = Math.sqrt(features.spread[f] ** 2 / weight + rounding[f] ** 2 / 6 / members.length);
    typical[f] = Math.sqrt(features.spread[f] ** 2 / (weight / members.length));
  }
  const length = members.reduce((sum, i) => sum + features.count[F_LOW][i], 0) / members.length;
  return { members, mean, error, typical, bias: rounding, length };
}

function apart(features: Features, f: number, a: number, b: number, ea: number, eb: number): number {
  if (Number.isNaN(a) || Number.isNaN(b)) return 0;
  const g = grain(f, a) + 0.03 * features.spread[f];
  return (a - b) / Math.sqrt(ea * ea + eb * eb + g * g);
}

/** Takes out what a larger group, or a pair of larger groups driving together, explains. */
function withoutMixtures(features: Features, groups: readonly Group[]): Group[] {
  const kept: Group[] = [];
  for (const group of groups) {
    if (kept.length >= 12) break;
    const rare = group.members.length <= 2 && kept.length > 0;
    if (rare && !standsOut(features, group, kept)) continue;
    if (kept.some((k) => blur(group, k) < PLAIN)) continue;
    if (kept.some((k) => sameButLonger(features, group, k)) || isMixture(features, group, kept)) continue;
    kept.push(group);
  }
  return kept;
}

/** How far apart two groups are in units of one message's error, all figures together. */
function blur(group: Group, other: Group): number {
  const square = (f: number): number => {
    const far = Math.max(0, Math.abs(group.mean[f] - other.mean[f]) - Math.max(group.bias[f], other.bias[f]));
    const d = far ** 2 / (group.typical[f] ** 2 + grain(f, group.mean[f]) ** 2);
    return Number.isNaN(d) ? 0 : d;
  };
  // The period is low and high once more, only sharper.
  const clock = Math.max(square(F_LOW) + square(F_HIGH), square(F_PERIOD));
  return Math.sqrt(clock + square(F_FALL) + square(F_RISE) + square(F_SDA_LEVEL));
}

/** A rare group must differ in a figure that no target and no bystander can change: the high, or the data delays. */
function standsOut(features: Features, group: Group, kept: readonly Group[]): boolean {
  return kept.every((k) => {
    const far = (f: number): number => Math.abs(apart(features, f, group.mean[f], k.mean[f], group.error[f], k.error[f]));
    return far(F_HIGH) > 8 || far(F_LOW) > 12 || (far(F_LOW) > 8 && (far(F_FALL) > 5 || far(F_RISE) > 5 || far(F_SDA_LEVEL) > 6));
  });
}

function sameButLonger(features: Features, group: Group, other: Group): boolean {
  const d = (f: number): number => apart(features, f, group.mean[f], other.mean[f], group.error[f], other.error[f]);
  const longer = d(F_LOW) > 0;
  const same = [F_HIGH, F_FALL, F_RISE, F_SDA_LEVEL].every((f) => Math.abs(d(f)) < 4);
  const small = group.members.length < 2 && Math.abs(d(F_LOW)) < 12;
  return longer && same && small;
}

/**
 * LOW the longer, HIGH the shorter, SDA falling at the earlier and rising at the later of two others: UM10204 3.1.7. Where one of them
 * kept the bus and was alone for part of the message, the figures lie between those of both together and its own.
 */
function isMixture(features: Features, group: Group, kept: readonly Group[]): boolean {
  return kept.some((keeper) => kept.some((other) => other !== keeper && isMixtureOf(features, group, keeper, other)));
}

/** Groups this much smaller than both may be contested for any part of their length; larger ones must be so throughout. */
const FEW = 4;
const SMALL = 0.25;

function isMixtureOf(features: Features, group: Group, keeper: Group, other: Group): boolean {
  const least = Math.min(keeper.members.length, other.members.length);
  if (group.members.length > least) return false;
  const both = (f: number): number => {
    const pick = f === F_LOW || f === F_RISE ? Math.max : Math.min;
    return pick(keeper.mean[f], other.mean[f]);
  };
  const error = (f: number): number => Math.max(keeper.error[f], other.error[f]) + 0.4 * features.spread[f];
  const z = (f: number, x: number): number => apart(features, f, group.mean[f], x, group.error[f], error(f));
  // Share of the message in which both drove, as far as the clock tells.
  const along = [F_LOW, F_HIGH].map((f) => (both(f) - keeper.mean[f]) / error(f));
  const at = [F_LOW, F_HIGH].map((f) => (group.mean[f] - keeper.mean[f]) / error(f));
  const length = Math.hypot(along[0], along[1]);
  const partly = group.members.length <= Math.max(FEW, SMALL * least);
  const share = partly && length > 0 ? Math.min(1, Math.max(0, (along[0] * at[0] + along[1] * at[1]) / length ** 2)) : 1;
  const clocks = [F_LOW, F_HIGH].every((f) => Math.abs(z(f, keeper.mean[f] + share * (both(f) - keeper.mean[f]))) < 3.5);
  if (!clocks) return false;
  // Who has yielded clocks on to the end of its byte at most. Where several bytes are clocked together nobody has, and both drive SDA.
  const driven = share === 1 && length > 3.5 && group.length > ONE_BYTE;
  // A handful may have been kept by the one here and by the other there.
  const handful = group.members.length <= FEW;
  // Two drivers sink lower than either, so that no mixture stands above whoever drives it alone for the rest.
  const top = handful ? Math.max(keeper.mean[F_SDA_LEVEL], other.mean[F_SDA_LEVEL]) : keeper.mean[F_SDA_LEVEL];
  if (z(F_SDA_LEVEL, top) > 3.5) return false;
  const end = (f: number): number => (handful ? other.mean[f] : driven ? both(f) : keeper.mean[f]);
  return [F_FALL, F_RISE].every((f) => between(z(f, handful ? keeper.mean[f] : both(f)), z(f, end(f))));
}

/** Lows inside bytes from which a message certainly has more than one byte. */
const ONE_BYTE = 10;

/** `a` and `b`: distances from the two ends, with sign, in standard errors; NaN where an end is not known. */
function between(a: number, b: number): boolean {
  return !(Math.min(a, b) > 3.5 || Math.max(a, b) < -3.5);
}
