// In: a seed. Out: a stream of numbers that is the same on every machine. Pure rooms never call Math.random.
// Generator: sfc32 (C. Doty-Humphrey, PractRand), seeded by splitmix32; both from memory, checked only for repeatability.

export interface Random {
  /** Uniform in [0, 1). */
  next(): number;
  /** Standard normal (Box-Muller). */
  gauss(): number;
  /** Uniform in [low, high). */
  range(low: number, high: number): number;
  /** Whole number in [low, high]. */
  int(low: number, high: number): number;
  chance(probability: number): boolean;
  pick<T>(list: readonly T[]): T;
}

export function createRandom(seed: number): Random {
  let state = seed >>> 0;
  const split = (): number => {
    state = (state + 0x9e3779b9) >>> 0;
    let z = state;
    z = Math.imul(z ^ (z >>> 16), 0x21f0aaad);
    z = Math.imul(z ^ (z >>> 15), 0x735a2d97);
    return (z ^ (z >>> 15)) >>> 0;
  };
  let a = split();
  let b = split();
  let c = split();
  let counter = 1;
  const next = (): number => {
    const t = (((a + b) | 0) + counter) | 0;
    counter = (counter + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = (((c << 21) | (c >>> 11)) + t) | 0;
    return (t >>> 0) / 4294967296;
  };
  for (let i = 0; i < 12; i++) next();
  return {
    next,
    gauss: () => Math.sqrt(-2 * Math.log(1 - next())) * Math.cos(2 * Math.PI * next()),
    range: (low, high) => low + (high - low) * next(),
    int: (low, high) => low + Math.floor((high - low + 1) * next()),
    chance: (probability) => next() < probability,
    pick: (list) => list[Math.floor(list.length * next())],
  };
}
