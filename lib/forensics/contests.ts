// In: one capture, its census, its taps. Out: the contests of the report, who made each message after they are settled, and up to
// where each was contested. What taps show is certain and goes first; the rest is inferred.

import type { Contest } from "../diagnosis/report";
import { type Capture, namingOf, placed } from "./capture";
import type { Census } from "./census";
import { type Evidence, evidenceOf, type Naming } from "./evidence";
import { FLOOR, gradeOf } from "./grade";
import { type Alignment, align, NO_ALIGNMENT, withLog } from "./log-match";
import { newSlots, readMessage } from "./message";
import { type Judged, judge, type Rates } from "./posterior";
import { Habitual } from "./retry";
import { learn } from "./signature";
import { part } from "./stream";
import type { TapFindings } from "./taps";
import { hiddenLoser } from "./untapped";
import { type Known, lastTogether, Scales } from "./weigh";

export interface ContestFindings {
  readonly contests: readonly Contest[];
  /** Per message: controller, -1 where it cannot be told. */
  readonly by: Int16Array;
  /** Per message: last entry in which more than one clocked; 0 where there was no contest. */
  readonly contestedUntil: Float64Array;
  readonly alignment: Alignment;
}

/** Captures of up to so many messages are weighed message by message, longer ones only where something is odd. */
const WHOLE = 1000;
/** Odds at which a controller is named: nine to one. */
const NAMED = Math.log(9);
/** Natural-log odds from which a message teaches its controller's habits. */
const SURE = 3;
/** Share of the probability that one pair must have to be named. */
const PAIR = 0.6;

interface Work {
  readonly capture: Capture;
  readonly census: Census;
  readonly tapped: TapFindings | null;
  readonly taps: number;
  scales: Scales;
  readonly habitual: Habitual;
  readonly naming: Naming;
  readonly contests: Contest[];
  readonly by: Int16Array;
  readonly contestedUntil: Float64Array;
}

export function contestsOf(capture: Capture, census: Census, tapped: TapFindings | null, taps: number): ContestFindings {
  const { ledger, messages, sampling } = capture;
  const by = census.by.slice();
  for (let m = 0; m < messages.count; m++) if (census.margin[m] < NAMED) by[m] = -1;
  const ends = Float64Array.from({ length: messages.count }, (_, m) => capture.endTick[messages.first[m + 1] - 1]);
  const work: Work = {
    capture,
    census,
    tapped,
    taps,
    scales: new Scales(ledger, messages, census.signatures, sampling, capture.vdd),
    habitual: new Habitual(ledger, messages, census, ends),
    naming: namingOf(capture, census),
    contests: [],
    by,
    contestedUntil: new Float64Array(messages.count),
  };
  if (tapped !== null) fromTaps(work, tapped);
  const alignment = census.signatures.length > 1 ? infer(work) : align(capture, certainTimes(work));
  work.contests.sort((x, y) => x.transaction - y.transaction || x.bit_index - y.bit_index);
  return { contests: work.contests, by, contestedUntil: work.contestedUntil, alignment };
}

function certainTimes(work: Work): { time_s: number; weight: number }[] {
  return work.contests.map((c) => ({ time_s: c.decided_s, weight: 1 }));
}

function fromTaps(work: Work, tapped: TapFindings): void {
  const { capture, census, habitual, naming } = work;
  const { ledger, messages } = capture;
  const slots = newSlots();
  for (const loss of tapped.losses) {
    readMessage(ledger, messages, loss.message, slots, loss.slot + 24);
    if (loss.slot >= slots.length) continue;
    const owner = tapped.owner[loss.message];
    const guess = census.by[loss.message];
    const kept = owner >= 0 ? owner : guess >= 0 && guess !== loss.tap ? guess : -1;
    work.by[loss.message] = kept;
    work.contestedUntil[loss.message] = slots.entry[Math.min(lastTogether(slots, loss.slot, 2), slots.length - 1)];
    const next = habitual.next(loss.message, loss.tap);
    const parting = next < 0 ? null : part(habitual.stream(loss.message), habitual.stream(next));
    const again = parting !== null && parting.outcome === "loses" && parting.at === loss.slot;
    const id = naming.id(loss.tap);
    work.contests.push({
      ...placed(capture, slots.transaction[loss.slot], slots.pulse[loss.slot]),
      kept: kept >= 0 ? naming.id(kept) : null,
      yielded: id,
      retry: again ? messages.first[next] : null,
      probability: 1,
      grade: gradeOf(1, true),
      evidence: [
        {
          kind: "drive-tap",
          bits: 20,
          detail: `The tap on ${id} releases SDA here while the bus is low, in a bit it was driving.`,
        },
      ],
      look_alikes: [],
    });
  }
}

/** Two pulses or more that somebody else began: one could be a spike. */
function foreignIn(tapped: TapFindings | null, m: number): boolean {
  return tapped !== null && (tapped.foreign[m] >= 2 || tapped.unseen[m] >= 2);
}

/** Both sides are tapped and no tap let go: nothing to infer. */
function allTapped(j: Judged, tapped: TapFindings | null, taps: number): boolean {
  return tapped !== null && j.best !== null && tapped.owner[j.message] >= 0 && j.best.a < taps && j.best.b < taps;
}

function infer(work: Work): Alignment {
  const { capture, census, tapped } = work;
  const { messages } = capture;
  const candidates: number[] = [];
  // A short capture is weighed whole: a retry can speak where the clock does not.
  const all = messages.count <= WHOLE;
  for (let m = 0; m < messages.count; m++) {
    if (work.contestedUntil[m] > 0) continue;
    if (all || census.odd[m] === 1 || foreignIn(tapped, m)) candidates.push(m);
  }
  const total = census.signatures.reduce((n, s) => n + s.messages + 1, 0);
  const share = census.signatures.map((s) => (s.messages + 1) / total);
  const known = (m: number): Known => ({ keeper: tapped?.owner[m] ?? -1, held: (tapped?.owner[m] ?? -1) >= 0 ? work.taps : 0 });
  const first = judge(work.scales, work.habitual, candidates, messages.count, share, known);
  const again = withoutContests(work, first.judged);
  if (again !== null) work.scales = again;
  const { judged, rates } = again === null ? first : judge(again, work.habitual, candidates, messages.count, share, known);
  const shown = judged.filter((j) => !allTapped(j, tapped, work.taps));
  const times = shown.map((j) => ({ time_s: timeOf(work, j), weight: j.probability }));
  const alignment = capture.log.length > 0 ? align(capture, [...certainTimes(work), ...times]) : NO_ALIGNMENT;
  for (const j of shown) report(work, j, rates, alignment);
  if (tapped !== null) besideTaps(work, tapped, rates);
  return alignment;
}

/** Probability of a contest below which a message may teach what its controller alone does. */
const PLAINLY_ALONE = 0.2;
/** Messages that a controller's habits are learned from at least. */
const LEAST_LESSONS = 6;

/**
 * Habits learned once more, now that it is known which messages are likely contests: those are like their keeper's in much, and where
 * they are many they bend what is taken for its own. Null where there are none.
 */
function withoutContests(work: Work, judged: readonly Judged[]): Scales | null {
  const { capture, census } = work;
  const { ledger, messages, sampling } = capture;
  const suspect = new Set(judged.filter((j) => j.probability >= PLAINLY_ALONE).map((j) => j.message));
  if (suspect.size === 0) return null;
  const lessons: number[][] = census.signatures.map(() => []);
  for (let m = 0; m < messages.count; m++) {
    if (census.by[m] >= 0 && !suspect.has(m) && work.contestedUntil[m] === 0 && census.margin[m] > SURE)
      lessons[census.by[m]].push(m);
  }
  const signatures = census.signatures.map((old, c) =>
    lessons[c].length < LEAST_LESSONS ? old : { ...learn(ledger, messages, lessons[c], sampling), messages: old.messages },
  );
  return new Scales(ledger, messages, signatures, sampling, capture.vdd);
}

/** Those without a tap that yielded in messages in which a tapped one did. */
function besideTaps(work: Work, tapped: TapFindings, rates: Rates): void {
  const { capture, census, scales, habitual, naming } = work;
  const { messages } = capture;
  const kinds = census.signatures.length;
  for (const m of new Set(tapped.losses.map((l) => l.message))) {
    const losers = tapped.losses.filter((l) => l.message === m);
    const keeper = work.by[m];
    const others = Array.from({ length: kinds }, (_, c) => c).filter((c) => c >= work.taps && c !== keeper);
    if (keeper < 0 || others.length === 0) continue;
    const hidden = hiddenLoser(scales, habitual, rates, { message: m, keeper, losers, others, until: tapped.unseenUntil[m] });
    if (hidden === null) continue;
    const proved = tapped.owner[m] >= 0 && tapped.unseen[m] >= 2;
    const probability = proved ? Math.max(hidden.probability, 0.99) : hidden.probability;
    if (probability < FLOOR) continue;
    const slots = scales.read(m);
    const option = { a: keeper, b: hidden.b, at: hidden.at, mode: hidden.mode, early: null, log: 0 };
    const evidence = evidenceOf(scales, m, option, keeper, habitual, rates, naming);
    if (proved) evidence.unshift(UNTAPPED);
    const until = slots.entry[lastTogether(slots, hidden.at, hidden.mode)];
    work.contestedUntil[m] = Math.max(work.contestedUntil[m], until);
    const rival = habitual.rival(m, hidden.b, rates);
    work.contests.push({
      ...placed(capture, slots.transaction[hidden.at], slots.pulse[hidden.at]),
      kept: naming.id(keeper),
      yielded: naming.id(hidden.b),
      retry: rival.retry >= 0 && rival.retrySlot === hidden.at ? messages.first[rival.retry] : null,
      probability: Math.min(probability, 0.999),
      grade: gradeOf(probability, proved),
      evidence,
      look_alikes: [],
    });
  }
}

const UNTAPPED: Evidence = {
  kind: "drive-tap",
  bits: 10,
  detail: "SCL or SDA falls where no tap pulls it, more than once: a controller without a tap.",
};

/** When the contest would have been decided; the START where none is supposed. */
function timeOf(work: Work, j: Judged): number {
  const { capture, scales } = work;
  const { ledger, messages, timebase } = capture;
  if (j.best === null) return ledger.openTick[messages.first[j.message]] / timebase.ticksPerSecond;
  const slots = scales.read(j.message);
  const at = j.best.at;
  return ledger.riseTick(slots.transaction[at], slots.pulse[at]) / timebase.ticksPerSecond;
}

function report(work: Work, j: Judged, rates: Rates, alignment: Alignment): void {
  const { capture, census, scales, habitual, naming } = work;
  const { best } = j;
  if (best === null) return;
  const proved = foreignIn(work.tapped, j.message);
  const logged = withLog(j.probability, timeOf(work, j), alignment);
  const probability = proved ? Math.max(logged.probability, 0.99) : logged.probability;
  if (probability >= 0.5) work.by[j.message] = j.pairShare > PAIR ? best.a : -1;
  else if (j.tie < 0.5 && census.margin[j.message] > NAMED) work.by[j.message] = j.alone;
  if (probability < FLOOR) return;
  const evidence = evidenceOf(scales, j.message, best, j.alone, habitual, rates, naming);
  if (logged.evidence !== null) evidence.push(logged.evidence);
  if (proved) {
    const detail = `SCL falls before the tap of ${naming.id(best.a)} pulls it, at several pulses: only another controller ends a HIGH.`;
    evidence.unshift({ kind: "drive-tap", bits: 10, detail });
  }
  const slots = scales.read(j.message);
  if (probability >= 0.5) work.contestedUntil[j.message] = slots.entry[lastTogether(slots, best.at, best.mode)];
  const parties = j.pairShare > PAIR;
  const claim = (b: number, s: number, p: number): Contest => {
    const rival = habitual.rival(j.message, b, rates);
    return {
      ...placed(capture, slots.transaction[s], slots.pulse[s]),
      kept: parties ? naming.id(best.a) : null,
      yielded: parties ? naming.id(b) : null,
      retry: rival.retry >= 0 && rival.retrySlot === s ? capture.messages.first[rival.retry] : null,
      probability: Math.min(p, 0.999),
      grade: gradeOf(p, proved),
      evidence,
      look_alikes: alternatives(j, probability),
    };
  };
  work.contests.push(claim(best.b, best.at, probability));
  if (best.early !== null) work.contests.push(claim(best.early.b, best.early.at, Math.min(j.third, probability)));
}

/** What else it could have been, with what is left of the probability. */
function alternatives(j: Judged, probability: number): Contest["look_alikes"] {
  const left = 1 - j.probability;
  const scale = left > 0 ? (1 - probability) / left : 0;
  const list = [
    {
      kind: "one-controller",
      probability: left - j.tie - j.slowed,
      detail: "One controller alone, its clock and data by chance as they would be in a contest.",
    },
    {
      kind: "slow-target",
      probability: j.slowed,
      detail: "One controller, and a target that lengthens every low by about the same.",
    },
    { kind: "tie", probability: j.tie, detail: "Two controllers that said the same to the end: nobody yielded." },
  ];
  return list.map((a) => ({ ...a, probability: Math.max(0, a.probability * scale) })).filter((a) => a.probability > 0.001);
}
