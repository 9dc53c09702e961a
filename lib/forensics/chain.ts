// In: intervals between SCL edges and what a hypothesis expects them to be. Out: the log density of each, one after the other.
// A one-dimensional Kalman filter (R. E. Kalman, 1960) over the true instant of the last edge: neighbouring intervals share a
// sampled edge, so their errors are not independent, and a clock that keeps time well is told from another by its phase even
// when one interval says little.

import type { HabitFigure } from "./signature";

const HALF_LOG_2PI = 0.9189385332046727;
const LOG_RANGE = Math.log(1000);

/** Least share of broken intervals assumed, whatever the capture shows: it bounds what one interval can prove. */
const LEAST_BROKEN = 0.01;
/** Nothing but a contender or noise shortens an interval. */
const SHORT_SHARE = 0.15;

/** Density of an interval that follows no habit: long by a stretch (any order of magnitude), or off by a part of itself. */
export function brokenDensity(x: number, mean: number): number {
  const near = Math.exp(-Math.abs(x - mean) / (0.1 * mean)) / (0.1 * mean);
  if (x <= mean) return SHORT_SHARE * near;
  const far = 1 / (Math.max(x, mean) * LOG_RANGE);
  return (1 - SHORT_SHARE) * (0.5 * near + 0.5 * far);
}

export class Chain {
  /** True instant of the last edge less its measured one: mean and variance. */
  private bias = 0;
  private variance: number;

  constructor(private readonly edgeVariance: number) {
    this.variance = edgeVariance;
  }

  restart(): void {
    this.bias = 0;
    this.variance = this.edgeVariance;
  }

  /** Natural log density of interval `x`. */
  step(x: number, mean: number, jitter: number, broken: number): number {
    const predicted = this.variance + jitter;
    const spread = predicted + this.edgeVariance;
    const innovation = x - mean - this.bias;
    const b = Math.max(broken, LEAST_BROKEN);
    const square = (innovation * innovation) / spread;
    const lawful = -HALF_LOG_2PI - 0.5 * Math.log(spread / ((1 - b) * (1 - b))) - 0.5 * square;
    // Within three standard deviations the habit explains it; the rest would change the third digit.
    if (square > 9) {
      const unlawful = Math.log(b * brokenDensity(x, mean));
      if (unlawful > lawful) {
        this.restart();
        return unlawful + Math.log1p(Math.exp(lawful - unlawful));
      }
    }
    const gain = predicted / spread;
    this.bias = -(1 - gain) * innovation;
    this.variance = (1 - gain) * predicted;
    return lawful;
  }
}

/** One interval on its own: data delays, START hold. */
export function single(x: number, habit: HabitFigure, edgeVariance: number): number {
  const spread = habit.jitter + 2 * edgeVariance;
  const d = x - habit.mean;
  const b = Math.max(habit.broken, LEAST_BROKEN);
  const scale = Math.max(habit.mean, 4 * Math.sqrt(spread));
  const broad = b / (scale * 4);
  return Math.log(
    ((1 - b) * Math.exp((-d * d) / (2 * spread))) / Math.sqrt(2 * Math.PI * spread) +
      broad * Math.exp(-Math.abs(d) / (2 * scale)),
  );
}
