"use client";

import { useEffect, useState } from "react";
import type { CaptureFile } from "@/lib/case/case";
import type { Source } from "@/workers/protocol";
import { wordsOf } from "./api";

export interface Archived {
  readonly source: Source | null;
  readonly trouble: string | null;
  readonly again: () => void;
}

/** The edge archive of a capture, fetched anew when it was replaced. Null while there is none, or none is wanted. */
export function useArchive(capture: CaptureFile | null, path: string): Archived {
  const [source, setSource] = useState<Source | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [round, setRound] = useState(0);
  const name = capture?.name ?? "";
  const size = capture?.archive_size ?? null;
  const read = JSON.stringify(capture?.read ?? null);

  // biome-ignore lint/correctness/useExhaustiveDependencies: another size, other choices or a new round mean another archive
  useEffect(() => {
    if (size === null) {
      setSource(null);
      return;
    }
    const stop = new AbortController();
    fetch(path, { signal: stop.signal })
      .then(async (answer) => {
        if (!answer.ok) throw new Error(`The storage answered ${answer.status}.`);
        const blob = await answer.blob();
        setTrouble(null);
        setSource({ kind: "archive", blob, name });
      })
      .catch((error: unknown) => {
        if (!stop.signal.aborted) setTrouble(wordsOf(error));
      });
    return () => stop.abort();
  }, [path, name, size, read, round]);

  return { source, trouble, again: () => setRound((now) => now + 1) };
}
