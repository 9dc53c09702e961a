// In: ledger and messages. Out: the controllers found, who made each message, and which messages do not look like any one
// controller alone. Only those go on to the full comparison of explanations, so the pass over everything is kept cheap.

import { clusters } from "./cluster";
import { featuresOf } from "./features";
import type { Ledger } from "./ledger";
import { DATA_FALL, DATA_RISE, HIGH_IN, LOW_IN, type Messages } from "./message";
import { learn, type Sampling, type Signature } from "./signature";
import { allGauges, Tally, tallyTransaction } from "./tally";

export interface Census {
  readonly signatures: readonly Signature[];
  /** Per message: most probable controller if it was alone, and the natural-log odds against the next best (Infinity: only one). */
  readonly by: Int16Array;
  readonly margin: Float32Array;
  /** 1: something in it does not fit that controller alone. */
  readonly odd: Uint8Array;
  /** Mean squared deviation from that controller's habits. */
  readonly misfit: Float32Array;
}

const SAMPLE = 450;
/** Messages that fit nobody, added to the sample in a second look: a rare controller may not be in the first. */
const STRANGERS = 150;
const LOOK = 220;
/** Mean squared deviation from which a message fits nobody. */
const STRANGE = 2.5;

/**
 * Signatures from the capture itself. `known[m]` is the controller of message m where taps show it, else -1; null without taps.
 * `closed`: there are no others than the known ones.
 */
export function takeCensus(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  known: Int16Array | null,
  kinds: number,
  closed = false,
): Census {
  const stride = Math.max(1, messages.count / SAMPLE);
  const first: number[] = [];
  for (let i = 0; i < messages.count; i += stride) first.push(Math.floor(i));
  let list: readonly number[] = first;
  let signatures = settle(ledger, messages, sampling, known, kinds, closed, list);
  let census = attribute(ledger, messages, sampling, signatures, known, null);
  const strangers = closed || list.length === messages.count ? [] : strangersOf(census, list);
  if (strangers.length > 0) {
    list = [...list, ...strangers].sort((a, b) => a - b);
    const again = settle(ledger, messages, sampling, known, kinds, closed, list);
    if (again.length > signatures.length) {
      signatures = again;
      census = attribute(ledger, messages, sampling, signatures, known, null);
    }
  }
  return census;
}

/** Groups the sample, learns each group, and learns again from what then fits. */
function settle(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  known: Int16Array | null,
  kinds: number,
  closed: boolean,
  list: readonly number[],
): readonly Signature[] {
  const features = featuresOf(ledger, messages, list, sampling);
  let signatures = clusters(features).map((group) => {
    const members = group.members.map((i) => features.messages[i]);
    return learn(ledger, messages, members, sampling);
  });
  if (known !== null) signatures = withKnown(ledger, messages, sampling, known, kinds, closed ? [] : signatures);
  for (let round = 0; round < 2 && signatures.length > 0; round++) {
    const census = attribute(ledger, messages, sampling, signatures, known, list);
    signatures = signatures.map((old, c) => {
      const members = list.filter((m) => census.by[m] === c && census.odd[m] === 0 && census.margin[m] > 3);
      return members.length > 0 ? { ...learn(ledger, messages, members, sampling), messages: old.messages } : old;
    });
  }
  const census = attribute(ledger, messages, sampling, signatures, known, list);
  const scale = messages.count / list.length;
  return signatures
    .map((s, c) => ({ ...s, messages: Math.round(scale * list.filter((m) => census.by[m] === c).length) }))
    .filter((s, c) => s.messages > 0 || (known !== null && c < kinds));
}

function strangersOf(census: Census, sample: readonly number[]): number[] {
  const taken = new Set(sample);
  const out: number[] = [];
  for (let m = 0; m < census.by.length; m++) if (census.misfit[m] > STRANGE && !taken.has(m)) out.push(m);
  const stride = Math.max(1, out.length / STRANGERS);
  return out.filter((_, i) => Math.floor(i / stride) !== Math.floor((i - 1) / stride));
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

/** `list`: only these messages; null for all. */
function attribute(
  ledger: Ledger,
  messages: Messages,
  sampling: Sampling,
  signatures: readonly Signature[],
  known: Int16Array | null,
  list: readonly number[] | null,
): Census {
  const n = messages.count;
  const census = {
    signatures,
    by: new Int16Array(n).fill(-1),
    margin: new Float32Array(n),
    odd: new Uint8Array(n),
    misfit: new Float32Array(n),
  };
  if (signatures.length === 0) return census;
  const g = allGauges(signatures, sampling);
  const tally = new Tally(signatures.length);
  const count = list === null ? n : list.length;
  for (let i = 0; i < count; i++) {
    const m = list === null ? i : list[i];
    tally.reset();
    const start = ledger.hold[messages.first[m]];
    if (start > 0) tally.one(g.hold, start);
    let left = LOOK;
    for (let t = messages.first[m]; t < messages.first[m + 1] && left > 0; t++) {
      tallyTransaction(ledger, t, left, g, tally);
      left -= ledger.pulses(t);
    }
    tally.clock(g.period);
    settleMessage(census, m, tally, known === null ? -1 : known[m]);
  }
  return census;
}

function settleMessage(
  census: { by: Int16Array; margin: Float32Array; odd: Uint8Array; misfit: Float32Array },
  m: number,
  tally: Tally,
  known: number,
): void {
  const { score } = tally;
  let best = 0;
  let next = Number.POSITIVE_INFINITY;
  for (let c = 1; c < score.length; c++) {
    if (score[c] < score[best]) {
      next = score[best];
      best = c;
    } else if (score[c] < next) next = score[c];
  }
  if (known >= 0) best = known;
  census.by[m] = best;
  census.margin[m] = known >= 0 ? Number.POSITIVE_INFINITY : (next - score[best]) / 2;
  census.odd[m] = tally.odd[best];
  census.misfit[m] = score[best] / Math.max(1, tally.counted);
}
