// In: the weighed messages of a capture. Out: probabilities, with the rates that the capture itself shows: how often contests
// happen, what each controller does after losing, how often it tries again. Expectation-maximisation (Dempster, Laird, Rubin, 1977).

import { logAdd } from "./normal";
import type { Habitual, RetryRates } from "./retry";
import type { Known, Option, Scales, Weighed } from "./weigh";

/** Before the capture has spoken: one message in a hundred, worth 20 messages of evidence. */
const PRIOR_CONTEST = 0.01;
const PRIOR_WEIGHT = 20;
/** Lows longer by one amount over many bits: rare, and then usually a target's own manner. */
const PRIOR_SLOWED = 0.004;
const ROUNDS = 4;
/**
 * Likelihood ratio from which a message has a say in how often contests happen. What says next to nothing about itself would, if a
 * signature is a little off, say it a hundred times in the same direction and carry the rate with it.
 */
const SPEAKS = 8;
const RAISE = 0.4;
const RAISE_RATE = 2;
/** A third contender is named only when it has this share of the probability. */
const THIRD_SURE = 0.9;

export interface Rates extends RetryRates {
  contest: number;
  /** Of the contests, those with a third contender. */
  third: number;
  /** Per controller: how likely it leaves at once, at the eighth, at the ninth pulse. */
  readonly modes: number[][];
  readonly share: number[];
}

export interface Judged {
  readonly message: number;
  /** Probability that more than one controller drove. */
  readonly probability: number;
  readonly tie: number;
  readonly slowed: number;
  /** Controller most probable if there was no contest. */
  readonly alone: number;
  /** Given a contest with a yield: best pair and its share, best slot and its share. */
  readonly best: Option | null;
  /** Probability that a third yielded too. */
  readonly third: number;
  readonly pairShare: number;
  readonly slotShare: number;
  readonly logAlone: number;
}

export function judge(
  scales: Scales,
  habitual: Habitual,
  odd: readonly number[],
  total: number,
  share: readonly number[],
  known?: (message: number) => Known,
): { judged: Judged[]; rates: Rates } {
  const kinds = scales.signatures.length;
  const rates: Rates = {
    contest: PRIOR_CONTEST,
    third: 0.03,
    again: 0.7,
    prompt: 0.7,
    modes: Array.from({ length: kinds }, () => [0.5, 0.15, 0.35]),
    share: [...share],
  };
  let judged: Judged[] = [];
  const weighed = odd.map((m) => scales.weigh(m, habitual, rates, known?.(m)));
  for (let round = 0; round < ROUNDS; round++) {
    judged = weighed.map((w) => conclude(w, rates, round === ROUNDS - 1));
    if (round < ROUNDS - 1) learnRates(weighed, judged, rates, total);
  }
  return { judged, rates };
}

function pairLog(rates: Rates, a: number, b: number): number {
  let sum = 0;
  for (let x = 0; x < rates.share.length; x++)
    for (let y = 0; y < rates.share.length; y++) if (x !== y) sum += rates.share[x] * rates.share[y];
  return Math.log((rates.share[a] * rates.share[b]) / sum);
}

function optionLog(option: Option, rates: Rates): number {
  const mode = option.at < 0 ? 0 : Math.log(rates.modes[option.b][option.mode]);
  const early =
    option.early === null
      ? 0
      : Math.log(rates.third) + Math.log(rates.share[option.early.b]) + Math.log(rates.modes[option.early.b][option.early.mode]);
  // A tie is counted for both orders.
  return Math.log(rates.contest) + pairLog(rates, option.a, option.b) + mode + early + option.log;
}

/**
 * The bounds on what single intervals may prove make the model too timid above one half: of the contests it puts at 0.6, nine in ten are
 * real in the calibration corpus. Log-odds above zero are raised by what the corpus shows; below one half nothing is raised, so that no
 * doubtful contest is called likely.
 */
function scaled(p: number): number {
  if (p <= 0.5 || p >= 1 - 1e-9) return p;
  const odds = Math.log(p / (1 - p));
  return 1 / (1 + Math.exp(-(odds + RAISE * (1 - Math.exp(-RAISE_RATE * odds)))));
}

function conclude(weighed: Weighed, rates: Rates, last: boolean): Judged {
  let alone = 0;
  let logAlone = Number.NEGATIVE_INFINITY;
  let none = Number.NEGATIVE_INFINITY;
  weighed.alone.forEach((log, c) => {
    const full = log + Math.log(rates.share[c]);
    none = logAdd(none, full);
    if (full > logAlone) {
      logAlone = full;
      alone = c;
    }
  });
  const slowed = weighed.slowed + Math.log(PRIOR_SLOWED);
  let yields = Number.NEGATIVE_INFINITY;
  let tie = Number.NEGATIVE_INFINITY;
  let triples = Number.NEGATIVE_INFINITY;
  const pairs = new Map<number, number>();
  const slots = new Map<number, number>();
  let best: Option | null = null;
  let bestLog = Number.NEGATIVE_INFINITY;
  for (const option of weighed.options) {
    const log = optionLog(option, rates);
    if (option.at < 0) {
      tie = logAdd(tie, log);
      continue;
    }
    yields = logAdd(yields, log);
    if (option.early !== null) triples = logAdd(triples, log);
    const pair = option.a * 64 + option.b;
    pairs.set(pair, logAdd(pairs.get(pair) ?? Number.NEGATIVE_INFINITY, log));
    slots.set(option.at, logAdd(slots.get(option.at) ?? Number.NEGATIVE_INFINITY, log));
    if (log > bestLog) {
      bestLog = log;
      best = option;
    }
  }
  const all = logAdd(logAdd(none, slowed), logAdd(yields, tie));
  const threefold = triples > yields + Math.log(THIRD_SURE);
  const chosen = best === null || !last ? best : pick(weighed.options, threefold, best, rates);
  const shareOf = (log: number | undefined): number => (log === undefined ? 0 : Math.exp(log - yields));
  return {
    message: weighed.message,
    probability: last ? scaled(Math.exp(yields - all)) : Math.exp(yields - all),
    tie: Math.exp(tie - all),
    slowed: Math.exp(slowed - all),
    alone,
    third: Math.exp(triples - all),
    best: chosen,
    pairShare: chosen === null ? 0 : shareOf(pairs.get(chosen.a * 64 + chosen.b)),
    slotShare: chosen === null ? 0 : shareOf(slots.get(chosen.at)),
    logAlone,
  };
}

/** Most probable pair, then most probable slot within it, then the best explanation there; with or without a third contender. */
function pick(options: readonly Option[], threefold: boolean, fallback: Option, rates: Rates): Option {
  const eligible = options.filter((o) => o.at >= 0 && (o.early !== null) === threefold);
  const top = (key: (o: Option) => number, list: readonly Option[]): Option[] => {
    const sums = new Map<number, number>();
    for (const o of list) sums.set(key(o), logAdd(sums.get(key(o)) ?? Number.NEGATIVE_INFINITY, optionLog(o, rates)));
    let winner = -1;
    let most = Number.NEGATIVE_INFINITY;
    for (const [k, log] of sums) {
      if (log <= most) continue;
      most = log;
      winner = k;
    }
    return list.filter((o) => key(o) === winner);
  };
  const pair = top((o) => o.a * 4096 + o.b * 64 + (o.early?.b ?? 0), eligible);
  const slot = top((o) => o.at, pair);
  const early = top((o) => o.early?.at ?? 0, slot);
  return early.reduce((x, y) => (optionLog(y, rates) > optionLog(x, rates) ? y : x), early[0] ?? fallback);
}

function learnRates(weighed: readonly Weighed[], judged: readonly Judged[], rates: Rates, total: number): void {
  let contests = 0;
  let thirds = 0;
  const modes = rates.modes.map(() => [1, 0.3, 0.7]);
  const odds = rates.contest / (1 - rates.contest);
  weighed.forEach((w, i) => {
    const p = judged[i].probability;
    if (p / Math.max(1 - p, 1e-12) > SPEAKS * odds) {
      contests += p;
      thirds += judged[i].third;
    }
    if (p < 0.05) return;
    let sum = Number.NEGATIVE_INFINITY;
    for (const o of w.options) if (o.at >= 0) sum = logAdd(sum, optionLog(o, rates));
    for (const o of w.options) if (o.at >= 0) modes[o.b][o.mode] += p * Math.exp(optionLog(o, rates) - sum);
  });
  rates.contest = Math.min(0.5, (contests + PRIOR_CONTEST * PRIOR_WEIGHT) / (total + PRIOR_WEIGHT));
  rates.third = (thirds + 0.15) / (contests + 5);
  modes.forEach((m, b) => {
    const s = m[0] + m[1] + m[2];
    for (let k = 0; k < 3; k++) rates.modes[b][k] = m[k] / s;
  });
}
