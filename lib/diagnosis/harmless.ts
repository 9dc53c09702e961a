// In: what looks like a fault and is none, one by one. Out: each kind with how often it occurred and where. Kept apart from the
// faults, so that nobody hunts for it; named, so that nobody takes it for something else.

import { seconds, type Timebase } from "../base/time";
import type { Harmless, HarmlessKind } from "./report";

/** Places listed per kind; all are counted. */
const LISTED = 100;

export interface HarmlessWords {
  readonly title: string;
  readonly meaning: string;
}

export const HARMLESS_WORDS: Readonly<Record<HarmlessKind, HarmlessWords>> = {
  "read-end-nack": {
    title: "NACK that ends a read",
    meaning: "The controller takes no more bytes and says so before STOP or a repeated START (UM10204 3.1.6, fifth reason).",
  },
  "ack-handover": {
    title: "Handover pulse at the acknowledge",
    meaning:
      "One driver lets SDA go and the next takes it over while SCL is low, before or after the ninth bit. Nobody reads SDA then.",
  },
  "low-pulse": {
    title: "SDA pulse while SCL is low",
    meaning: "SDA may change as often as it likes while SCL is low (UM10204 3.1.3); only its level at the rise of SCL counts.",
  },
  "crosstalk-dip": {
    title: "Dip that crosses no threshold",
    meaning:
      "A high was pulled down, mostly by an edge on a line beside it, and came back without reaching VIH. No receiver sees it; it eats noise margin (UM10204 Table 10, VnH).",
  },
};

interface Found {
  readonly tick: number;
  readonly transaction: number | null | undefined;
}

export class HarmlessList {
  private readonly places = new Map<HarmlessKind, Found[]>();
  private readonly counts = new Map<HarmlessKind, number>();

  constructor(private readonly base: Timebase) {}

  /** `transaction`: undefined is found by time when the record has ended. */
  add(kind: HarmlessKind, tick: number, transaction?: number | null): void {
    const count = (this.counts.get(kind) ?? 0) + 1;
    this.counts.set(kind, count);
    if (count > LISTED) return;
    const list = this.places.get(kind);
    if (list === undefined) this.places.set(kind, [{ tick, transaction }]);
    else list.push({ tick, transaction });
  }

  count(kind: HarmlessKind): number {
    return this.counts.get(kind) ?? 0;
  }

  /** @param transactionAt the transaction that a tick lies in, or null */
  told(transactionAt: (tick: number) => number | null): Harmless[] {
    return [...this.counts].map(([kind, count]) => ({
      kind,
      count,
      places: [...(this.places.get(kind) ?? [])]
        .sort((a, b) => a.tick - b.tick)
        .map(({ tick, transaction }) => ({
          transaction: transaction === undefined ? transactionAt(tick) : transaction,
          time_s: seconds(tick, this.base),
        })),
    }));
  }
}
