// In: numbers. Out: the densities and order statistics that the inference is built from.

const HALF_LOG_2PI = 0.9189385332046727;

/** Natural log of the normal density. */
export function logNormal(x: number, mean: number, variance: number): number {
  const d = x - mean;
  return -HALF_LOG_2PI - 0.5 * Math.log(variance) - (d * d) / (2 * variance);
}

/** log(exp(a) + exp(b)). */
export function logAdd(a: number, b: number): number {
  if (a === Number.NEGATIVE_INFINITY) return b;
  if (b === Number.NEGATIVE_INFINITY) return a;
  return a > b ? a + Math.log1p(Math.exp(b - a)) : b + Math.log1p(Math.exp(a - b));
}

/** Standard normal distribution function (Abramowitz and Stegun 7.1.26, error below 1.5e-7; from memory, checked in tests). */
export function phi(x: number): number {
  const z = Math.abs(x) / Math.SQRT2;
  const t = 1 / (1 + 0.3275911 * z);
  const poly = t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429))));
  const erf = 1 - poly * Math.exp(-z * z);
  return x >= 0 ? 0.5 * (1 + erf) : 0.5 * (1 - erf);
}

export interface Moments {
  readonly mean: number;
  readonly variance: number;
}

/** Mean and variance of the larger of two independent normals (C. E. Clark, 1961; from memory, checked in tests). */
export function larger(a: Moments, b: Moments): Moments {
  const spread = Math.sqrt(a.variance + b.variance);
  if (spread === 0) return a.mean >= b.mean ? a : b;
  const alpha = (a.mean - b.mean) / spread;
  const density = Math.exp(-0.5 * alpha * alpha) / Math.sqrt(2 * Math.PI);
  const up = phi(alpha);
  const mean = a.mean * up + b.mean * (1 - up) + spread * density;
  const square =
    (a.mean * a.mean + a.variance) * up + (b.mean * b.mean + b.variance) * (1 - up) + (a.mean + b.mean) * spread * density;
  return { mean, variance: Math.max(square - mean * mean, 0) };
}

export function smaller(a: Moments, b: Moments): Moments {
  const m = larger({ mean: -a.mean, variance: a.variance }, { mean: -b.mean, variance: b.variance });
  return { mean: -m.mean, variance: m.variance };
}

/** Value at a share of a sorted list, 0 to 1. */
export function quantile(sorted: Float64Array, share: number): number {
  if (sorted.length === 0) return Number.NaN;
  const at = share * (sorted.length - 1);
  const i = Math.floor(at);
  const next = Math.min(i + 1, sorted.length - 1);
  return sorted[i] + (at - i) * (sorted[next] - sorted[i]);
}
