// In: how often each low level occurred. Out: the plateaus it clusters at. Drivers that pull through different resistances stand at
// different lows (REFERENCE 7, the low-level fingerprint), so each plateau is a driver, or several that pull alike or together.

/** Two plateaus lie further apart than this, in volts and as a share of VDD; an eye's measure, common practice, no source. */
const APART_V = 0.015;
const APART_SHARE = 0.004;
/** A plateau holds at least this share of all lows, and so many; the rest lies between plateaus. */
const LEAST_SHARE = 0.005;
const LEAST = 3;

export interface Plateau {
  /** Median, V. */
  readonly v: number;
  readonly count: number;
}

/** @param levels pairs of a level and how many lows stood there, in any order */
export function plateausOf(levels: readonly (readonly [number, number])[], vdd: number): Plateau[] {
  const sorted = [...levels].sort((a, b) => a[0] - b[0]);
  const total = sorted.reduce((sum, [, n]) => sum + n, 0);
  const apart = Math.max(APART_V, APART_SHARE * vdd);
  const groups: (readonly [number, number])[][] = [];
  for (const level of sorted) {
    const group = groups.at(-1);
    if (group !== undefined && level[0] - (group.at(-1)?.[0] ?? 0) <= apart) group.push(level);
    else groups.push([level]);
  }
  return groups
    .map((group) => ({ v: medianOf(group), count: group.reduce((sum, [, n]) => sum + n, 0) }))
    .filter(({ count }) => count >= Math.max(LEAST, LEAST_SHARE * total));
}

function medianOf(group: readonly (readonly [number, number])[]): number {
  const half = group.reduce((sum, [, n]) => sum + n, 0) / 2;
  let passed = 0;
  for (const [v, n] of group) {
    passed += n;
    if (passed >= half) return v;
  }
  return group[0][0];
}
