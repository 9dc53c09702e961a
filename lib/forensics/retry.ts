// In: messages with their controllers. Out: for a contest supposed at a slot, how much more expected the following message is
// than it would be anyway, and how likely that slot is at all given what the other controller usually sends.

import type { Census } from "./census";
import type { Ledger } from "./ledger";
import { type Messages, newSlots, readMessage } from "./message";
import { part, streamOf } from "./stream";

/** Messages after the contested one in which a retry is looked for. */
const WINDOW = 8;
/** Messages of a controller that are compared to learn what it usually sends. */
const LIBRARY = 160;
const LOOK = 220;

export interface RetryRates {
  /** Chance that a loser tries again within the window; learned, starts here. */
  again: number;
  /** Chance that a retry starts as soon as the bus is free. */
  prompt: number;
}

/** What a rival would bring into a contest with one given message. */
export interface Rival {
  /** Prior probability of yielding at each slot; the rest of the probability would not have yielded. */
  readonly at: Float64Array;
  /** Prior probability of saying just the same. */
  readonly same: number;
  /** Message that would be its retry, or -1; slot at which that one parts from the bus. */
  readonly retry: number;
  readonly retrySlot: number;
  /** Natural-log likelihood ratio of that message, for a contest at `retrySlot`. */
  readonly retryGain: number;
  readonly elsewhereGain: number;
  /** Share of this controller's messages that would part there by chance. */
  readonly base: number;
  readonly promptly: boolean;
}

export class Habitual {
  private readonly streams: Map<number, Uint8Array> = new Map();
  private readonly library: number[][];
  private readonly gap: Float64Array;
  private readonly promptGap: Float64Array;
  private readonly promptShare: Float64Array;
  private readonly slots = newSlots();

  constructor(
    private readonly ledger: Ledger,
    private readonly messages: Messages,
    private readonly census: Census,
    endTicks: Float64Array,
  ) {
    const kinds = census.signatures.length;
    this.library = Array.from({ length: kinds }, () => []);
    const own: number[][] = Array.from({ length: kinds }, () => []);
    for (let m = 0; m < messages.count; m++) if (census.by[m] >= 0) own[census.by[m]].push(m);
    this.gap = new Float64Array(messages.count).fill(Number.POSITIVE_INFINITY);
    for (let m = 1; m < messages.count; m++) this.gap[m] = ledger.openTick[messages.first[m]] - endTicks[m - 1];
    this.promptGap = new Float64Array(kinds);
    this.promptShare = new Float64Array(kinds);
    own.forEach((list, c) => {
      const stride = Math.max(1, list.length / LIBRARY);
      for (let i = 0; i < list.length; i += stride) this.library[c].push(list[Math.floor(i)]);
      const gaps = Float64Array.from(list, (m) => this.gap[m]).sort();
      const least = gaps.find((g) => g > 0) ?? 0;
      this.promptGap[c] = 2.5 * least;
      this.promptShare[c] = (gaps.filter((g) => g <= 2.5 * least).length + 0.5) / (list.length + 1);
    });
  }

  stream(m: number): Uint8Array {
    let stream = this.streams.get(m);
    if (stream === undefined) {
      readMessage(this.ledger, this.messages, m, this.slots, LOOK);
      stream = streamOf(this.slots);
      this.streams.set(m, stream);
    }
    return stream;
  }

  /** Next message of controller `c` after `m`, within the window; -1 if none. */
  next(m: number, c: number): number {
    for (let r = m + 1; r < this.messages.count && r <= m + WINDOW; r++) if (this.census.by[r] === c) return r;
    return -1;
  }

  rival(m: number, c: number, rates: RetryRates): Rival {
    const bus = this.stream(m);
    const n = bus.length;
    const at = new Float64Array(n);
    const retry = this.next(m, c);
    let total = 0;
    let same = 0;
    for (const other of this.library[c]) {
      if (other === m || other === retry) continue;
      total++;
      const parting = part(bus, this.stream(other));
      if (parting.outcome === "loses") at[parting.at]++;
      else if (parting.outcome === "same") same++;
    }
    let zeros = 0;
    for (let s = 0; s < n; s++) if (bus[s] === 0 || bus[s] === 3) zeros++;
    const base = new Float64Array(n);
    for (let s = 0; s < n; s++) {
      const flat = zeros > 0 && (bus[s] === 0 || bus[s] === 3) ? 0.5 / zeros : 0;
      base[s] = (at[s] + 0.5 * flat) / (total + 1);
      // The rival's message in a contest: mostly one of its usual ones, sometimes one not seen before.
      at[s] = (at[s] + 2 * flat) / (total + 2);
    }
    const parting = retry < 0 ? null : part(bus, this.stream(retry));
    const shown = parting !== null && parting.outcome === "loses" ? parting.at : -1;
    const promptly = retry >= 0 && this.gap[retry] <= this.promptGap[c];
    const gapShare = promptly ? this.promptShare[c] : 1 - this.promptShare[c];
    const gapGain = Math.log((promptly ? rates.prompt : 1 - rates.prompt) / gapShare);
    const usual = shown >= 0 ? Math.max(base[shown], 1e-6) : 1;
    return {
      at,
      same: (same + 0.05) / (total + 2),
      retry: shown >= 0 ? retry : -1,
      retrySlot: shown,
      retryGain: shown >= 0 ? Math.log((rates.again * Math.exp(gapGain)) / usual + 1 - rates.again) : 0,
      // Near the end of the record a retry may simply not have been recorded.
      elsewhereGain: m + WINDOW < this.messages.count || retry >= 0 ? Math.log(1 - rates.again) : 0,
      base: usual,
      promptly,
    };
  }
}
