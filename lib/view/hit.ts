// In: an instant. Out: what stands there: the transaction it lies in, or the one nearest to it.

import type { Ledger } from "./ledger";

/** The transaction in which `tick` lies, or null between transactions. */
export function transactionAt(ledger: Ledger, tick: number): number | null {
  const index = ledger.after(tick) - 1;
  return index >= 0 && tick <= ledger.endTick(index) ? index : null;
}

/** The transaction in which `tick` lies, else the nearest one; null in an empty ledger. */
export function transactionNear(ledger: Ledger, tick: number): number | null {
  if (ledger.length === 0) return null;
  const before = ledger.after(tick) - 1;
  if (before < 0) return 0;
  if (tick <= ledger.endTick(before) || before + 1 >= ledger.length) return before;
  return tick - ledger.endTick(before) <= ledger.startTick(before + 1) - tick ? before : before + 1;
}

/** First and one past the last transaction that touch a span. */
export function transactionsIn(ledger: Ledger, from: number, to: number): { readonly first: number; readonly end: number } {
  const before = ledger.after(from) - 1;
  const first = before >= 0 && ledger.endTick(before) >= from ? before : before + 1;
  return { first, end: ledger.after(to) };
}
