"use client";

import { useEffect, useRef, useState } from "react";
import { wordsOf } from "./api";
import { readOnServer, storeAnalysis } from "./archive";
import { type Item, localSource } from "./items";

/**
 * Sees to it that every capture of the case has its edge archive and summary: packed from the local file as soon as that has
 * arrived in storage, and again when it is read differently; by the server where the file is no longer at hand because the
 * page was left too early. One at a time.
 */
export function useKeeping(items: readonly Item[], may: boolean, refresh: () => Promise<void>) {
  const [trouble, setTrouble] = useState<string | null>(null);
  const [round, setRound] = useState(0);
  // The last reading begun for each capture: one that failed is not begun again by itself, an earlier one come back to is.
  const begun = useRef(new Map<string, string>());
  const busy = useRef(false);
  const next = may ? items.find((item) => wants(item) && begun.current.get(item.key) !== markOf(item)) : undefined;
  const mark = next ? markOf(next) : null;

  // biome-ignore lint/correctness/useExhaustiveDependencies: the mark stands for the item it is made of
  useEffect(() => {
    if (!next?.capture || mark === null || busy.current) return;
    busy.current = true;
    begun.current.set(next.key, mark);
    const { capture, transfer } = next;
    const kept = transfer
      ? storeAnalysis(capture.id, localSource(transfer), transfer.read, capture.log)
      : readOnServer(capture.id, capture.read, capture.log);
    kept
      .then(
        () => setTrouble(null),
        (error: unknown) => setTrouble(`${capture.name}: ${wordsOf(error)}`),
      )
      .finally(() => {
        busy.current = false;
        setRound((now) => now + 1);
        return refresh();
      });
  }, [mark, round, refresh]);

  return {
    trouble,
    again: () => {
      begun.current.clear();
      setTrouble(null);
      setRound((now) => now + 1);
    },
  };
}

function markOf({ capture, transfer }: Item): string {
  return `${capture?.id} ${JSON.stringify(transfer ? transfer.read : "kept")}`;
}

/** A capture without an archive, or one whose file at hand is by now read in another way than the one kept. */
function wants({ capture, transfer }: Item): boolean {
  if (capture === null) return false;
  if (capture.archive_size === null) return true;
  return transfer !== null && JSON.stringify(transfer.read) !== JSON.stringify(capture.read);
}
