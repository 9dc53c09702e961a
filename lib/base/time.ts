// In: integer ticks. Out: seconds on the file's own time axis. The only place that converts between the two.
// Ticks are whole numbers held in doubles (exact up to 2^53); a tick is the VCD's own step, a picosecond for a CSV
// with times, or one sample where no interval is known.

/** How ticks become seconds. */
export interface Timebase {
  /** Ticks in one second: 1e12 for picoseconds, 1 / (multiplier x unit) for a VCD, 1 where ticks are sample numbers. */
  readonly ticksPerSecond: number;
  /** file: times or an interval stood in the file; given: the person gave the interval; assumed: ticks are sample numbers. */
  readonly origin: "file" | "given" | "assumed";
}

/** Seconds of a tick. Division by an exact power of ten rounds once, so 1234567 ps prints as 0.000001234567. */
export function seconds(ticks: number, base: Timebase): number {
  return ticks / base.ticksPerSecond;
}

/** Nearest whole tick of a time in seconds. */
export function ticks(atSeconds: number, base: Timebase): number {
  return Math.round(atSeconds * base.ticksPerSecond);
}

/** Whether limits in seconds may be judged on this time axis. */
export function judgeable(base: Timebase): boolean {
  return base.origin !== "assumed";
}
