"use client";

import { useCallback, useEffect, useSyncExternalStore } from "react";
import type { CaptureFile } from "@/lib/case/case";
import type { Source } from "@/workers/protocol";
import { useShelf } from "../intake/shelf";
import type { Transfer } from "../intake/transfer";

/** One capture of the case on this page: kept, or still on its way with the file at hand, or both. */
export interface Item {
  /** Stays the same while a transfer becomes a capture. */
  readonly key: string;
  readonly name: string;
  readonly capture: CaptureFile | null;
  readonly transfer: Transfer | null;
}

const localSources = new WeakMap<Transfer, Source>();

/** The picked file as a source, the same object every time, so that it is not read anew. */
export function localSource(transfer: Transfer): Source {
  const known = localSources.get(transfer);
  if (known) return known;
  const made: Source = { kind: "file", blob: transfer.file, name: transfer.file.name };
  localSources.set(transfer, made);
  return made;
}

/** What about a transfer makes this page draw anew; its progress is drawn by its own line. */
function stateOf(transfer: Transfer): string {
  return `${transfer.view().state} ${JSON.stringify(transfer.read)}`;
}

/** Draws anew with every change of state, also one that came between the drawing and the listening. */
function useStates(transfers: readonly Transfer[]): void {
  const subscribe = useCallback(
    (listener: () => void) => {
      const ends = transfers.map((transfer) => transfer.subscribe(listener));
      return () => {
        for (const end of ends) end();
      };
    },
    [transfers],
  );
  useSyncExternalStore(
    subscribe,
    () => transfers.map(stateOf).join("\n"),
    () => "",
  );
}

/**
 * The captures of a case and what is on its way to it. `onArrival` is called when a transfer has become a capture that
 * `captures` lacks, also where it did so before this page stood: a small file can be quicker than the page.
 */
export function useItems(caseNumber: number, captures: readonly CaptureFile[], onArrival: () => void): readonly Item[] {
  const transfers = useShelf(caseNumber);
  useStates(transfers);
  const arrived = new Map<string, Transfer>();
  for (const transfer of transfers) {
    const capture = transfer.view().capture;
    if (capture) arrived.set(capture.id, transfer);
  }
  const known = new Set(captures.map((capture) => capture.id));
  const missing = [...arrived.keys()].filter((id) => !known.has(id)).join(" ");
  useEffect(() => {
    if (missing !== "") onArrival();
  }, [missing, onArrival]);

  const kept = captures.map((capture) => {
    const transfer = arrived.get(capture.id) ?? null;
    return { key: transfer?.key ?? capture.id, name: capture.name, capture, transfer };
  });
  const coming = transfers.filter((transfer) => {
    const { state, capture } = transfer.view();
    return state !== "cancelled" && !(capture && known.has(capture.id));
  });
  return [...kept, ...coming.map((transfer) => ({ key: transfer.key, name: transfer.file.name, capture: null, transfer }))];
}
