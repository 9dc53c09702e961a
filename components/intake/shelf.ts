// Files on their way, kept for as long as the page lives, across its own navigation: picked on the intake page, shown and
// decoded on the case page while they travel.

import { useSyncExternalStore } from "react";
import type { Transfer } from "./transfer";

const shelves = new Map<number, readonly Transfer[]>();
const listeners = new Set<() => void>();
const NONE: readonly Transfer[] = [];

export function shelve(transfer: Transfer): void {
  const now = shelves.get(transfer.caseNumber) ?? NONE;
  shelves.set(transfer.caseNumber, [...now, transfer]);
  for (const listener of listeners) listener();
}

export function unshelve(transfer: Transfer): void {
  const now = shelves.get(transfer.caseNumber) ?? NONE;
  shelves.set(
    transfer.caseNumber,
    now.filter((other) => other !== transfer),
  );
  for (const listener of listeners) listener();
}

function subscribe(listener: () => void): () => void {
  listeners.add(listener);
  return () => listeners.delete(listener);
}

/** The transfers of one case, in the order they were begun. */
export function useShelf(caseNumber: number): readonly Transfer[] {
  return useSyncExternalStore(
    subscribe,
    () => shelves.get(caseNumber) ?? NONE,
    () => NONE,
  );
}
