// In: bits, transactions, taps, roster and log of one capture. Out: its controllers, who made each transaction, stretches,
// contests and look-alikes. Streams into a ledger while the file is read; everything else is concluded once at the end.

import type { Timebase } from "../base/time";
import type { Contest, ControllerRow } from "../diagnosis/report";
import { NO_ADDRESS, type TransactionBlock } from "../engine/bus/transactions";
import type { CaptureHead, TapChoice } from "../engine/samples/reader";
import { type Census, takeCensus } from "./census";
import type { CreateForensics, Forensics, ForensicsOptions, ForensicsOutcome, RosterEntry } from "./contract";
import { evidenceOf, type Naming } from "./evidence";
import { FLOOR, gradeOf } from "./grade";
import { Ledger } from "./ledger";
import { HIGH_IN, LOW_IN, type Messages, messagesOf } from "./message";
import { type Judged, judge } from "./posterior";
import { Habitual } from "./retry";
import type { Sampling, Signature } from "./signature";
import { stretchesOf } from "./stretch";
import { readTaps, type TapFindings, TapTrace } from "./taps";
import { lastTogether, Scales } from "./weigh";

/** What a bystander of a simulation may know beforehand: who made the uncontested messages. For calibration only. */
export interface Observer {
  readonly kinds: number;
  /** Controller of the message that starts at a tick, -1 where it was contested. */
  controller(startTick: number): number;
}

export const createForensics: CreateForensics = (head, taps, options) => openForensics(head, taps, options, null);

export function openForensics(
  head: CaptureHead,
  taps: readonly TapChoice[],
  options: ForensicsOptions,
  observer: Observer | null,
): Forensics {
  const ledger = new Ledger(head.levels === "volts");
  const traces = taps.map((tap) => new TapTrace(tap.label, tap.scl !== null, tap.sda !== null));
  const ends: Float64Array[] = [];
  const addresses: Int16Array[] = [];
  return {
    bits: (block) => ledger.push(block),
    transactions(block: TransactionBlock) {
      ends.push(block.endTick.subarray(0, block.length));
      addresses.push(block.address.subarray(0, block.length));
    },
    tap: (index, block) => traces[index]?.push(block),
    conclude() {
      ledger.finish();
      const step = head.sampleTicks ?? gridOf(ledger);
      const capture: Capture = {
        ledger,
        messages: messagesOf(ledger),
        endTick: joinDoubles(ends, ledger.transactions),
        address: joinAddresses(addresses, ledger.transactions),
        sampling: { step, variance: head.levels === "volts" ? (0.03 * step) ** 2 : (step * step) / 12 },
        timebase: head.timebase,
        vdd: head.vdd_v,
        roster: options.roster,
      };
      return concludeCapture(capture, traces, observer);
    },
  };
}

interface Capture {
  readonly ledger: Ledger;
  readonly messages: Messages;
  readonly endTick: Float64Array;
  readonly address: Int16Array;
  readonly sampling: Sampling;
  readonly timebase: Timebase;
  readonly vdd: number | null;
  readonly roster: readonly RosterEntry[];
}

/** Captures of up to so many messages are weighed message by message, longer ones only where something is odd. */
const WHOLE = 1000;

function concludeCapture(capture: Capture, traces: readonly TapTrace[], observer: Observer | null): ForensicsOutcome {
  const { ledger, messages, sampling } = capture;
  const tapped = traces.some((t) => t.used) ? readTaps(ledger, messages, traces, sampling.step) : null;
  const census =
    observer === null
      ? takeCensus(ledger, messages, sampling, tapped === null ? null : tapped.owner, traces.length)
      : observed(ledger, messages, sampling, observer);
  const by = census.by.slice();
  for (let m = 0; m < messages.count; m++) if (census.margin[m] < Math.log(9)) by[m] = -1;
  const contests: Contest[] = [];
  const contestedUntil = new Float64Array(messages.count);
  const contested = new Uint8Array(messages.count);
  if (tapped !== null) tapContests(capture, census, tapped, contests, contested, contestedUntil, by);
  inferContests(capture, census, tapped, traces, contests, contested, contestedUntil, by);
  contests.sort((x, y) => x.transaction - y.transaction || x.bit_index - y.bit_index);
  const naming = order(capture, census, by);
  const stretches = stretchesOf({ ...capture, census, by, contestedUntil });
  return {
    contests: contests.map((c) => ({
      ...c,
      kept: naming.rename(c.kept),
      yielded: naming.rename(c.yielded),
      evidence: c.evidence,
    })),
    controllers: naming.rows(traces),
    attribution: perTransaction(messages, by, naming.index),
    stretches,
    lookAlikes: [],
  };
}

function observed(ledger: Ledger, messages: Messages, sampling: Sampling, observer: Observer): Census {
  const known = new Int16Array(messages.count);
  for (let m = 0; m < messages.count; m++) known[m] = observer.controller(ledger.openTick[messages.first[m]]);
  const census = takeCensus(ledger, messages, sampling, known, observer.kinds, true);
  return { ...census, odd: census.odd.map(() => 1) };
}

/** Rank of each controller by its first transaction; C1 is the first seen. Evidence texts already use these ids. */
function ranks(census: Census): Int16Array {
  const index = new Int16Array(census.signatures.length).fill(-1);
  let next = 0;
  for (const c of census.by) if (c >= 0 && index[c] < 0) index[c] = next++;
  for (let c = 0; c < index.length; c++) if (index[c] < 0) index[c] = next++;
  return index;
}

interface Ordered {
  readonly index: Int16Array;
  rename(id: string | null): string | null;
  rows(traces: readonly TapTrace[]): ControllerRow[];
}

function order(capture: Capture, census: Census, by: Int16Array): Ordered {
  const index = ranks(census);
  const perSecond = capture.timebase.ticksPerSecond;
  const counts = new Int32Array(index.length);
  for (let m = 0; m < by.length; m++) if (by[m] >= 0) counts[by[m]] += capture.messages.first[m + 1] - capture.messages.first[m];
  const rows = (traces: readonly TapTrace[]): ControllerRow[] => {
    const out: ControllerRow[] = [];
    census.signatures.forEach((s, c) => {
      const low = s.habits[LOW_IN];
      const high = s.habits[HIGH_IN];
      const tap = c < traces.length && traces.some((t) => t.used) ? traces[c].label : null;
      out[index[c]] = {
        id: `C${index[c] + 1}`,
        name: tap ?? rosterName(capture.roster, s, perSecond),
        tlow_s: low === null ? null : low.mean / perSecond,
        thigh_s: high === null ? null : high.mean / perSecond,
        vol_v: s.sdaLow === null ? null : s.sdaLow.mean,
        transactions: counts[c],
      };
    });
    return out;
  };
  return { index, rename: (id) => id, rows };
}

/** The one roster controller whose clock lies within 4 % of the measured one. */
function rosterName(roster: readonly RosterEntry[], signature: Signature, perSecond: number): string | null {
  const near = (given: number | null, habit: number): boolean => {
    const h = signature.habits[habit];
    return given !== null && h !== null && Math.abs(h.mean / perSecond - given) < 0.04 * given;
  };
  const fits = roster.filter((r) => r.role === "controller" && near(r.tlow_s, LOW_IN) && near(r.thigh_s, HIGH_IN));
  return fits.length === 1 ? fits[0].name : null;
}

function perTransaction(messages: Messages, by: Int16Array, index: Int16Array): Int16Array {
  const out = new Int16Array(messages.of.length).fill(-1);
  for (let t = 0; t < out.length; t++) {
    const c = by[messages.of[t]];
    if (c >= 0) out[t] = index[c];
  }
  return out;
}

function inferContests(
  capture: Capture,
  census: Census,
  tapped: TapFindings | null,
  traces: readonly TapTrace[],
  contests: Contest[],
  contested: Uint8Array,
  contestedUntil: Float64Array,
  by: Int16Array,
): void {
  const { ledger, messages, sampling } = capture;
  const { signatures } = census;
  if (signatures.length < 2) return;
  const scales = new Scales(ledger, messages, signatures, sampling, capture.vdd);
  const ends = new Float64Array(messages.count);
  for (let m = 0; m < messages.count; m++) ends[m] = capture.endTick[messages.first[m + 1] - 1];
  const habitual = new Habitual(ledger, messages, census, ends);
  const odd: number[] = [];
  // A short capture is weighed whole: a retry can speak where the clock does not.
  const all = messages.count <= WHOLE;
  for (let m = 0; m < messages.count; m++)
    if ((all || census.odd[m] === 1 || foreignIn(tapped, m)) && contested[m] === 0) odd.push(m);
  const share = signatures.map((s) => (s.messages + 1) / (signatures.reduce((n, x) => n + x.messages, 0) + signatures.length));
  const { judged, rates } = judge(scales, habitual, odd, messages.count, share);
  const index = ranks(census);
  const naming: Naming = {
    id: (c) => `C${index[c] + 1}`,
    microseconds: (ticks) =>
      Number.isNaN(ticks) ? "unknown" : `${((ticks / capture.timebase.ticksPerSecond) * 1e6).toFixed(3)} us`,
  };
  for (const j of judged) {
    if (j.best === null) continue;
    // Both sides tapped and no tap let go: nothing to infer.
    if (tapped !== null && untappedNeeded(j, tapped, traces.length)) continue;
    const shown = foreignIn(tapped, j.message);
    const probability = shown ? Math.max(j.probability, 0.99) : j.probability;
    if (probability >= 0.5) by[j.message] = j.pairShare > 0.6 ? j.best.a : -1;
    else if (j.tie < 0.5 && census.margin[j.message] > Math.log(9)) by[j.message] = j.alone;
    if (probability < FLOOR) continue;
    const slots = scales.read(j.message);
    if (probability >= 0.5) contestedUntil[j.message] = slots.entry[lastTogether(slots, j.best.at, j.best.mode)];
    const evidence = evidenceOf(scales, j.message, j.best, j.alone, habitual, rates, naming);
    if (shown)
      evidence.unshift({
        kind: "drive-tap",
        bits: 10,
        detail: `SCL falls before the tap of ${naming.id(j.best.a)} pulls it, at several pulses: only another controller ends a HIGH.`,
      });
    scales.read(j.message);
    const parties = j.pairShare > 0.6;
    const claim = (b: number, s: number, p: number): Contest => {
      const t = slots.transaction[s];
      const rival = habitual.rival(j.message, b, rates);
      scales.read(j.message);
      return {
        ...placed(capture, t, slots.pulse[s]),
        kept: parties ? naming.id(j.best?.a ?? 0) : null,
        yielded: parties ? naming.id(b) : null,
        retry: rival.retry >= 0 && rival.retrySlot === s ? messages.first[rival.retry] : null,
        probability: Math.min(p, 0.999),
        grade: gradeOf(p, shown),
        evidence,
        look_alikes: [],
      };
    };
    contests.push(claim(j.best.b, j.best.at, probability));
    if (j.best.early !== null) contests.push(claim(j.best.early.b, j.best.early.at, j.third));
  }
}

/** Where a contest stands, as the report writes it. */
function placed(
  capture: Capture,
  t: number,
  pulse: number,
): Pick<Contest, "transaction" | "start_s" | "decided_s" | "byte" | "bit" | "bit_index"> {
  const perSecond = capture.timebase.ticksPerSecond;
  return {
    transaction: t,
    start_s: capture.ledger.openTick[t] / perSecond,
    decided_s: capture.ledger.riseTick(t, pulse) / perSecond,
    byte: Math.floor(pulse / 9),
    bit: pulse % 9,
    bit_index: pulse,
  };
}

/** Two pulses or more that somebody else began: one could be a spike. */
function foreignIn(tapped: TapFindings | null, m: number): boolean {
  return tapped !== null && tapped.foreign[m] >= 2;
}

function untappedNeeded(j: Judged, tapped: TapFindings, taps: number): boolean {
  const owner = tapped.owner[j.message];
  return j.best !== null && owner >= 0 && j.best.a < taps && j.best.b < taps;
}

function tapContests(
  capture: Capture,
  census: Census,
  tapped: TapFindings,
  contests: Contest[],
  contested: Uint8Array,
  contestedUntil: Float64Array,
  by: Int16Array,
): void {
  const { ledger, messages } = capture;
  const scales = new Scales(ledger, messages, census.signatures, capture.sampling, capture.vdd);
  const index = ranks(census);
  for (const loss of tapped.losses) {
    const slots = scales.read(loss.message);
    if (loss.slot >= slots.length) continue;
    contested[loss.message] = 1;
    const owner = tapped.owner[loss.message];
    const kept =
      owner >= 0 ? owner : census.by[loss.message] >= 0 && census.by[loss.message] !== loss.tap ? census.by[loss.message] : -1;
    by[loss.message] = kept;
    contestedUntil[loss.message] = slots.entry[Math.min(lastTogether(slots, loss.slot, 2), slots.length - 1)];
    const t = slots.transaction[loss.slot];
    const pulse = slots.pulse[loss.slot];
    const next = nextOf(tapped, loss.message, loss.tap);
    contests.push({
      ...placed(capture, t, pulse),
      kept: kept >= 0 ? `C${index[kept] + 1}` : null,
      yielded: `C${index[loss.tap] + 1}`,
      retry: next >= 0 ? messages.first[next] : null,
      probability: 1,
      grade: gradeOf(1, true),
      evidence: [
        {
          kind: "drive-tap",
          bits: 20,
          detail: `The tap on C${index[loss.tap] + 1} releases SDA here while the bus is low, in a bit it was driving.`,
        },
      ],
      look_alikes: [],
    });
  }
}

function nextOf(tapped: TapFindings, m: number, tap: number): number {
  for (let r = m + 1; r < tapped.owner.length && r <= m + 8; r++) if (tapped.owner[r] === tap) return r;
  return -1;
}

/** Step of the time grid that the events stand on: the greatest common divisor of many intervals. */
function gridOf(ledger: Ledger): number {
  let grid = 0;
  let seen = 0;
  for (let i = 0; i < ledger.count && seen < 400; i++) {
    for (const x of [ledger.low[i], ledger.high[i]]) {
      if (!(x > 0) || x > 1.6e7) continue;
      seen++;
      let a = grid;
      let b = Math.round(x);
      while (b > 0) {
        const r = a % b;
        a = b;
        b = r;
      }
      grid = a;
      if (grid === 1) return 1;
    }
  }
  return Math.max(grid, 1);
}

function joinDoubles(parts: readonly Float64Array[], length: number): Float64Array {
  const out = new Float64Array(length);
  let n = 0;
  for (const part of parts) {
    out.set(part.subarray(0, Math.max(0, length - n)), n);
    n += part.length;
  }
  return out;
}

function joinAddresses(parts: readonly Int16Array[], length: number): Int16Array {
  const out = new Int16Array(length).fill(NO_ADDRESS);
  let n = 0;
  for (const part of parts) {
    out.set(part.subarray(0, Math.max(0, length - n)), n);
    n += part.length;
  }
  return out;
}
