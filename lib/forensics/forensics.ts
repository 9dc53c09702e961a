// In: bits, transactions, taps, roster and log of one capture. Out: its controllers, who made each transaction, stretches,
// contests and look-alikes. Streams into a ledger while the file is read; everything else is concluded once at the end.

import type { ControllerRow } from "../diagnosis/report";
import { type ByteBlock, NO_ADDRESS, type TransactionBlock } from "../engine/bus/transactions";
import type { CaptureHead, TapChoice } from "../engine/samples/reader";
import { Answers, betweenTargets } from "./answers";
import { blindPairs } from "./blind";
import { type Capture, ranks } from "./capture";
import { type Census, takeCensus } from "./census";
import { contestsOf } from "./contests";
import type { CreateForensics, Forensics, ForensicsOptions, ForensicsOutcome, RosterEntry } from "./contract";
import { Ledger } from "./ledger";
import { placed } from "./log-match";
import { lookAlikesOf } from "./look-alikes";
import { HIGH_IN, LOW_IN, type Messages, messagesOf } from "./message";
import type { Sampling, Signature } from "./signature";
import { stretchesOf } from "./stretch";
import { readTaps, TapTrace } from "./taps";

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
  const answers = new Answers();
  const ends: Float64Array[] = [];
  const addresses: Int16Array[] = [];
  return {
    bits: (block) => ledger.push(block),
    transactions(block: TransactionBlock, bytes: ByteBlock) {
      answers.push(block, bytes);
      ends.push(block.endTick.subarray(0, block.length));
      addresses.push(block.address.subarray(0, block.length));
    },
    tap: (index, block) => traces[index]?.push(block),
    conclude(endTick) {
      ledger.finish();
      const step = head.sampleTicks ?? gridOf(ledger);
      const capture: Capture = {
        ledger,
        messages: messagesOf(ledger),
        endTick: joinDoubles(ends, ledger.transactions),
        address: joinAddresses(addresses, ledger.transactions),
        sampling: samplingOf(ledger, step, head.levels === "volts"),
        timebase: head.timebase,
        vdd: head.vdd_v,
        roster: options.roster,
        log: options.log,
      };
      const targetContests = betweenTargets(answers.list, head.timebase.ticksPerSecond);
      return { ...concludeCapture(capture, traces, observer, [head.startTick, endTick]), targetContests };
    },
  };
}

function concludeCapture(
  capture: Capture,
  traces: readonly TapTrace[],
  observer: Observer | null,
  record: readonly [number, number],
): Omit<ForensicsOutcome, "targetContests"> {
  const { ledger, messages, sampling } = capture;
  const perSecond = capture.timebase.ticksPerSecond;
  const tapped = traces.some((t) => t.used)
    ? readTaps(ledger, messages, traces, sampling.step, (ledger.sdaLevel === null ? 0.5 : 1.6) * sampling.step)
    : null;
  const census =
    observer === null
      ? takeCensus(ledger, messages, sampling, tapped === null ? null : tapped.owner, traces.length)
      : observed(ledger, messages, sampling, observer);
  const found = contestsOf(capture, census, tapped, traces.length);
  const ordered = order(capture, census, found.by);
  return {
    contests: found.contests,
    controllers: ordered.rows(traces),
    attribution: perTransaction(messages, found.by, ordered.index),
    stretches: stretchesOf({ ...capture, census, by: found.by, contestedUntil: found.contestedUntil }),
    lookAlikes: lookAlikesOf(capture, found),
    blindPairs: blindPairs(census.signatures, capture, tapped === null ? 0 : traces.length, (c) => `C${ordered.index[c] + 1}`),
    log: placed(capture.log, found.alignment, record[0] / perSecond, record[1] / perSecond),
  };
}

function observed(ledger: Ledger, messages: Messages, sampling: Sampling, observer: Observer): Census {
  const known = new Int16Array(messages.count);
  for (let m = 0; m < messages.count; m++) known[m] = observer.controller(ledger.openTick[messages.first[m]]);
  const census = takeCensus(ledger, messages, sampling, known, observer.kinds, true);
  return { ...census, odd: census.odd.map(() => 1) };
}

interface Ordered {
  readonly index: Int16Array;
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
  return { index, rows };
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

/** Samples in a low from which its clock is believed in full. */
const FINE = 10;

function samplingOf(ledger: Ledger, step: number, volts: boolean): Sampling {
  // Crossings of a line in volts are interpolated between samples.
  if (volts) return { step, variance: (0.03 * step) ** 2, trust: 1, long: Number.POSITIVE_INFINITY };
  const lows = ledger.low
    .slice(0, Math.min(ledger.count, 2000))
    .filter((low) => low > 0)
    .sort();
  const typical = lows.length > 0 ? lows[lows.length >> 1] : 0;
  const trust = Math.min(1, Math.max(0.3, typical / step / FINE));
  return { step, variance: (step * step) / 12, trust, long: Number.POSITIVE_INFINITY };
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
