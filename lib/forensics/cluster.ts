// In: features of messages. Out: groups of messages that one controller each can have made, their number not known beforehand.
// Density clustering (DBSCAN: Ester, Kriegel, Sander, Xu, 1996; from memory) in units of each figure's own uncertainty, then
// what is not a controller is taken out: groups that are the longest-low, shortest-high mixture of two others (contests), and
// groups that differ only by a longer low.

import { F_FALL, F_HIGH, F_LOW, F_RISE, F_SDA_LEVEL, type Features, variance } from "./features";
import { splitGroups } from "./split";

/** Not the level of SCL: a target that stretches pulls it lower too. */
const TOLD_BY = [F_LOW, F_HIGH, F_FALL, F_RISE, F_SDA_LEVEL] as const;
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
  return f >= F_SDA_LEVEL ? GRAIN_V : GRAIN * value;
}

/** Largest difference of two messages in standard errors. */
function distance(features: Features, i: number, j: number): number {
  let worst = 0;
  for (const f of TOLD_BY) {
    const a = features.value[f][i];
    const b = features.value[f][j];
    if (Number.isNaN(a) || Number.isNaN(b)) continue;
    const g = grain(f, a);
    const d = Math.abs(a - b) / Math.sqrt(variance(features, f, i) + variance(features, f, j) + g * g);
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
    let common = 0;
    for (const i of members) common += f === F_LOW || f === F_HIGH ? features.coherent[i] : 0;
    error[f] = Math.sqrt(features.spread[f] ** 2 / weight + common / members.length ** 2);
    typical[f] = Math.sqrt(features.spread[f] ** 2 / (weight / members.length) + common / members.length);
  }
  return { members, mean, error, typical };
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
  let square = 0;
  for (const f of TOLD_BY) {
    const d = (group.mean[f] - other.mean[f]) ** 2 / (group.typical[f] ** 2 + grain(f, group.mean[f]) ** 2);
    if (!Number.isNaN(d)) square += d;
  }
  return Math.sqrt(square);
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

/** LOW the longer, HIGH the shorter, SDA falling at the earlier and rising at the later of two others: UM10204 3.1.7. */
function isMixture(features: Features, group: Group, kept: readonly Group[]): boolean {
  for (let a = 0; a < kept.length; a++) {
    for (let b = a + 1; b < kept.length; b++) {
      if (group.members.length > 0.6 * Math.min(kept[a].members.length, kept[b].members.length)) continue;
      const x = kept[a];
      const y = kept[b];
      const fits = (f: number, pick: (p: number, q: number) => number): boolean => {
        const m = Number.isNaN(x.mean[f]) || Number.isNaN(y.mean[f]) ? Number.NaN : pick(x.mean[f], y.mean[f]);
        const e = Math.max(x.error[f], y.error[f]) + 0.4 * features.spread[f];
        return Math.abs(apart(features, f, group.mean[f], m, group.error[f], e)) < 3.5;
      };
      const clocks = fits(F_LOW, Math.max) && fits(F_HIGH, Math.min);
      // In a few messages the data delays are a mixture of contested and uncontested bits.
      if (clocks && group.members.length <= 3) return true;
      if (clocks && fits(F_FALL, Math.min) && fits(F_RISE, Math.max)) return true;
    }
  }
  return false;
}
