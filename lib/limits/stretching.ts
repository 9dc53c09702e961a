// In: attributed stretches of a capture. Out: the cumulative columns of SMBus: tLOW:SEXT per START to STOP, tLOW:MEXT per byte.
// (RM0440 39.4.12, LM5066 notes: another device may add to the sum, so a bus total over 25 ms is suspicion of one target.)

import { type Timebase, ticks } from "../base/time";
import { Column } from "./column";
import { Judge } from "./judge";
import { MEXT, SEXT } from "./parameters";
import type { LimitTable } from "./profile";
import { tickLimit, ticksOfNs } from "./ticks";

/** One stretch as attribution tells it; times in seconds. */
export interface Stretched {
  readonly transaction: number;
  readonly byte: number;
  readonly start_s: number;
  readonly excess_s: number;
  readonly by: "target" | "controller" | "unknown";
}

export interface CumulativeStretch {
  readonly sext: Column;
  readonly mext: Column;
}

/**
 * Stretches in order of time.
 * @param firstOf index of the transaction whose START opens the message that transaction n belongs to
 */
export function cumulativeStretch(
  stretches: readonly Stretched[],
  firstOf: (transaction: number) => number,
  table: LimitTable,
  base: Timebase,
  doubt: number,
): CumulativeStretch {
  const sext = columnOf(SEXT.symbol, table, base, doubt);
  const mext = columnOf(MEXT.symbol, table, base, doubt);
  const targets = new Sums(sext);
  const controllers = new Sums(mext);
  for (const stretch of stretches) {
    const tick = ticks(stretch.start_s, base);
    const excess = ticks(stretch.excess_s, base);
    if (stretch.by === "controller")
      controllers.add(`${stretch.transaction}.${stretch.byte}`, excess, tick, stretch.transaction, doubt);
    else targets.add(`${firstOf(stretch.transaction)}`, excess, tick, stretch.transaction, doubt);
  }
  targets.end(doubt);
  controllers.end(doubt);
  return { sext, mext };
}

function columnOf(symbol: string, table: LimitTable, base: Timebase, doubt: number): Column {
  const limit = tickLimit(symbol, table, base);
  return new Column(symbol, [limit === null ? null : new Judge(limit, ticksOfNs(1, base))], doubt);
}

/** Adds up what shares a key, and hands the sum to the column when the key changes. */
class Sums {
  private key: string | null = null;
  private sum = 0;
  private tick = 0;
  private transaction = -1;

  constructor(private readonly column: Column) {}

  add(key: string, excess: number, tick: number, transaction: number, doubt: number): void {
    if (key !== this.key) {
      this.end(doubt);
      this.key = key;
      this.sum = 0;
      this.tick = tick;
      this.transaction = transaction;
    }
    this.sum += excess;
  }

  end(doubt: number): void {
    if (this.key !== null) this.column.add(this.sum, doubt, this.tick, this.transaction);
    this.key = null;
  }
}
