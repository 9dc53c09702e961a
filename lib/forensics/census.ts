// In: ledger and messages. Out: the controllers found, who made each message, and which messages do not look like any one
// controller alone. Only those go on to the full comparison of explanations, so the pass over everything is kept cheap.

import { clusters } from "./cluster";
import { featuresOf } from "./features";
import { type Ledger, VALUE } from "./ledger";
import { DATA_FALL, DATA_RISE, HIGH_IN, HIGH_NINTH, HOLD_START, LOW_IN, type Messages } from "./message";
import { learn, type Sampling, type Signature } from "./signature";

export interface Census {
  readonly signatures: readonly Signature[];
  /** Per message: most probable controller if it was alone, and the natural-log odds against the next best (Infinity: only one). */
  readonly by: Int16Array;
  readonly margin: Float32Array;
  /** 1: something in it does not fit that controller alone. */
  readonly odd: Uint8Array;
}

const SAMPLE = 900;
const LOOK = 220;
/** A squared deviation counts for no more than this: one wild interval says that it is wild, not whose it is. */
const CAP = 20;

/** Signatures from the capture itself. `closed`: there are no others than the known ones. `known[m]` is the controller of message m where taps show it, else -1; null without taps. */
export function takeCensus(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  known: Int16Array | null,
  kinds: number,
  closed = false,
): Census {
  const list: number[] = [];
  const stride = Math.max(1, messages.count / SAMPLE);
  for (let i = 0; i < messages.count; i += stride) list.push(Math.floor(i));
  const features = featuresOf(ledger, messages, list, sampling.step);
  let signatures = clusters(features).map((group) => {
    const members = group.members.map((i) => features.messages[i]);
    return learn(ledger, messages, members, sampling);
  });
  if (known !== null) signatures = withKnown(ledger, messages, sampling, known, kinds, closed ? [] : signatures);
  let census = attribute(ledger, messages, sampling, signatures, known);
  for (let round = 0; round < 2 && signatures.length > 0; round++) {
    signatures = signatures.map((old, c) => {
      const members: number[] = [];
      for (let m = 0; m < messages.count; m++)
        if (census.by[m] === c && census.odd[m] === 0 && census.margin[m] > 3) members.push(m);
      return members.length > 0 ? learn(ledger, messages, members, sampling) : old;
    });
    census = attribute(ledger, messages, sampling, signatures, known);
  }
  return census;
}

/** Tapped controllers come first, in the order of their taps; clusters that are one of them are dropped. */
function withKnown(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  known: Int16Array,
  kinds: number,
  found: readonly Signature[],
): Signature[] {
  const out: Signature[] = [];
  for (let k = 0; k < kinds; k++) {
    const members: number[] = [];
    for (let m = 0; m < messages.count; m++) if (known[m] === k) members.push(m);
    out.push(learn(ledger, messages, members, sampling));
  }
  const unknown: number[] = [];
  for (let m = 0; m < messages.count; m++) if (known[m] < 0) unknown.push(m);
  if (unknown.length === 0) return out;
  for (const signature of found) if (out.every((k) => k.messages === 0 || apart(k, signature, sampling))) out.push(signature);
  return out;
}

function apart(a: Signature, b: Signature, sampling: Sampling): boolean {
  return [LOW_IN, HIGH_IN, DATA_FALL, DATA_RISE].some((h) => {
    const x = a.habits[h];
    const y = b.habits[h];
    if (x === null || y === null || x.count === 0 || y.count === 0) return false;
    const error =
      (x.jitter + 2 * sampling.variance) / x.count + (y.jitter + 2 * sampling.variance) / y.count + (4e-4 * x.mean) ** 2;
    return Math.abs(x.mean - y.mean) > 5 * Math.sqrt(error);
  });
}

interface Gauge {
  readonly mean: number;
  readonly inverse: number;
}

function gauges(signatures: readonly Signature[], habit: number, sampling: Sampling): Gauge[] {
  return signatures.map((s) => {
    const h = s.habits[habit];
    return h === null || h.count === 0
      ? { mean: 0, inverse: 0 }
      : { mean: h.mean, inverse: 1 / Math.sqrt(h.jitter + 2 * sampling.variance) };
  });
}

function attribute(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  signatures: readonly Signature[],
  known: Int16Array | null,
): Census {
  const n = messages.count;
  const by = new Int16Array(n).fill(-1);
  const margin = new Float32Array(n);
  const odd = new Uint8Array(n);
  const kinds = signatures.length;
  const low = gauges(signatures, LOW_IN, sampling);
  const high = gauges(signatures, HIGH_IN, sampling);
  const ninth = gauges(signatures, HIGH_NINTH, sampling);
  const fall = gauges(signatures, DATA_FALL, sampling);
  const rise = gauges(signatures, DATA_RISE, sampling);
  const hold = gauges(signatures, HOLD_START, sampling);
  const longest = Math.max(0, ...low.map((g) => (g.inverse === 0 ? 0 : g.mean + 6 / g.inverse)));
  const score = new Float64Array(kinds);
  const odds = new Uint8Array(kinds);
  const runLow = new Float64Array(kinds);
  const runHigh = new Float64Array(kinds);

  const count = (gauge: Gauge, c: number, x: number, limit: number): void => {
    const z = (x - gauge.mean) * gauge.inverse;
    const square = z * z;
    score[c] += Math.min(square, CAP);
    if (square > limit) odds[c] = 1;
  };
  const levels = levelGauges(signatures);

  for (let m = 0; m < n; m++) {
    score.fill(0);
    odds.fill(0);
    runLow.fill(0);
    runHigh.fill(0);
    const start = ledger.hold[messages.first[m]];
    if (!Number.isNaN(start)) for (let c = 0; c < kinds; c++) count(hold[c], c, start, 14);
    let looked = 0;
    let lows = 0;
    let highs = 0;
    for (let t = messages.first[m]; t < messages.first[m + 1] && looked < LOOK; t++) {
      const base = ledger.openEntry[t] + 1;
      const pulses = Math.min(ledger.pulses(t), LOOK - looked);
      looked += pulses;
      const read = pulses > 7 && (ledger.what[base + 7] & VALUE) !== 0;
      let bit = 0;
      for (let p = 0; p < pulses; p++) {
        const e = base + p;
        const l = ledger.low[e];
        const h = ledger.high[e];
        if (bit !== 0 && bit !== 8 && l < longest) {
          lows++;
          for (let c = 0; c < kinds; c++) {
            const z = (l - low[c].mean) * low[c].inverse;
            const square = z * z;
            score[c] += Math.min(square, CAP);
            runLow[c] += z;
            if (square > 12 || (lows > 2 && runLow[c] * runLow[c] > 11 * lows)) odds[c] = 1;
          }
        }
        if (!Number.isNaN(h) && bit !== 8) {
          highs++;
          for (let c = 0; c < kinds; c++) {
            const z = (h - high[c].mean) * high[c].inverse;
            const square = z * z;
            score[c] += Math.min(square, CAP);
            runHigh[c] += z;
            if (square > 12 || (highs > 2 && runHigh[c] * runHigh[c] > 11 * highs)) odds[c] = 1;
          }
        } else if (!Number.isNaN(h)) for (let c = 0; c < kinds; c++) count(ninth[c], c, h, 14);
        const own = bit > 0 && bit < 8 && (!read || p < 8);
        if (own && ledger.first[e] === ledger.last[e]) {
          const gauge = (ledger.what[e] & VALUE) === 0 ? fall : rise;
          for (let c = 0; c < kinds; c++) count(gauge[c], c, ledger.first[e], 14);
        }
        if (own && levels !== null && ledger.sdaLevel !== null && ledger.sclLevel !== null) {
          for (let c = 0; c < kinds; c++) {
            if (!Number.isNaN(ledger.sclLevel[e])) count(levels.scl[c], c, ledger.sclLevel[e], 10);
            if ((ledger.what[e] & VALUE) === 0 && !Number.isNaN(ledger.sdaLevel[e]))
              count(levels.sda[c], c, ledger.sdaLevel[e], 10);
          }
        }
        bit = bit === 8 ? 0 : bit + 1;
      }
    }
    if (known !== null && known[m] >= 0) {
      by[m] = known[m];
      margin[m] = Number.POSITIVE_INFINITY;
      odd[m] = odds[known[m]];
      continue;
    }
    let best = -1;
    let next = Number.POSITIVE_INFINITY;
    for (let c = 0; c < kinds; c++) {
      if (best < 0 || score[c] < score[best]) {
        if (best >= 0) next = score[best];
        best = c;
      } else if (score[c] < next) next = score[c];
    }
    by[m] = best;
    if (best < 0) continue;
    margin[m] = (next - score[best]) / 2;
    odd[m] = odds[best];
  }
  return { signatures, by, margin, odd };
}

function levelGauges(signatures: readonly Signature[]): { sda: Gauge[]; scl: Gauge[] } | null {
  if (signatures.every((s) => s.sdaLow === null)) return null;
  const gauge = (level: Signature["sdaLow"]): Gauge =>
    level === null ? { mean: 0, inverse: 0 } : { mean: level.mean, inverse: 1 / Math.sqrt(level.variance + 1e-6) };
  return { sda: signatures.map((s) => gauge(s.sdaLow)), scl: signatures.map((s) => gauge(s.sclLow)) };
}
