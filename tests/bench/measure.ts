// What a bench suite is, and how cases are timed: interleaved rounds in one process, medians, ratios against a baseline of
// the same run. The machine's own speed cancels out; absolute times are printed only for orientation.

export interface Row {
  /** Number of the goal in PERF's table, or what the row is for. */
  readonly goal: string;
  readonly what: string;
  /** Median milliseconds of the case and of its baseline. */
  readonly ms: number;
  readonly baseline: string;
  readonly baselineMs: number;
  /** What `ms` and `baselineMs` really count where it is not milliseconds ("bytes"). */
  readonly unit?: string;
  /** at most: ms / baselineMs must not exceed `limit`; at least: baselineMs / ms must reach it. */
  readonly sense: "at most" | "at least";
  readonly limit: number;
}

export interface Suite {
  readonly name: string;
  run(): Promise<Row[]>;
}

export interface Case {
  readonly name: string;
  run(): Promise<void> | void;
}

/** Median milliseconds per case over `rounds` rounds, cases taking turns, after one round to warm up. */
export async function interleaved(cases: readonly Case[], rounds: number): Promise<Map<string, number>> {
  const times = new Map<string, number[]>(cases.map((one) => [one.name, []]));
  for (let round = 0; round <= rounds; round += 1) {
    for (const one of cases) {
      globalThis.gc?.();
      const start = performance.now();
      await one.run();
      const spent = performance.now() - start;
      if (round > 0) times.get(one.name)?.push(spent);
    }
  }
  return new Map([...times].map(([name, list]) => [name, median(list)]));
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

export function ratio(row: Row): number {
  return row.sense === "at most" ? row.ms / row.baselineMs : row.baselineMs / row.ms;
}

export function met(row: Row): boolean {
  return row.sense === "at most" ? ratio(row) <= row.limit : ratio(row) >= row.limit;
}
