// In: what the rules find, in any order. Out: the report's fault list, in order of time, with places in seconds. Bounded: of each
// kind only so many are listed, and the rest are counted.

import { seconds, type Timebase } from "../base/time";
import { HarmlessList } from "./harmless";
import type { Fault, FaultKind, Harmless, HarmlessKind } from "./report";
import type { Findings } from "./rule";

/** Faults listed per kind. */
const LISTED = 20_000;

interface Found {
  readonly kind: FaultKind;
  readonly tick: number;
  readonly detail: string;
  readonly transaction: number | null | undefined;
}

export class FaultList implements Findings {
  private readonly found: Found[] = [];
  private readonly counts = new Map<FaultKind, number>();

  private readonly lawful: HarmlessList;

  constructor(readonly base: Timebase) {
    this.lawful = new HarmlessList(base);
  }

  harmless(kind: HarmlessKind, tick: number, transaction?: number | null): void {
    this.lawful.add(kind, tick, transaction);
  }

  harmlessOnes(transactionAt: (tick: number) => number | null): Harmless[] {
    return this.lawful.told(transactionAt);
  }

  add(kind: FaultKind, tick: number, detail: string, transaction?: number | null): void {
    const count = (this.counts.get(kind) ?? 0) + 1;
    this.counts.set(kind, count);
    if (count <= LISTED) this.found.push({ kind, tick, detail, transaction });
  }

  /** How many faults of each kind there are, listed or not. */
  totals(): ReadonlyMap<FaultKind, number> {
    return this.counts;
  }

  /** Kinds of which some are not listed, with how many. */
  unlisted(): [FaultKind, number][] {
    return [...this.counts].filter(([, count]) => count > LISTED).map(([kind, count]) => [kind, count - LISTED]);
  }

  /** @param transactionAt the transaction that a tick lies in, or null */
  faults(transactionAt: (tick: number) => number | null): Fault[] {
    return [...this.found]
      .sort((a, b) => a.tick - b.tick)
      .map(({ kind, tick, detail, transaction }) => ({
        kind,
        transaction: transaction === undefined ? transactionAt(tick) : transaction,
        time_s: seconds(tick, this.base),
        detail,
      }));
  }
}
