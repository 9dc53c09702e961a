"use client";

import { useCallback, useEffect, useRef, useState } from "react";
import type { Problem } from "@/lib/base/result";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import { Capture } from "@/lib/view/capture";
import type { Source } from "@/workers/protocol";
import { DecodeClient } from "./client";

/** What became of the file. "refused" is about the file and says what to do; "crashed" is our fault. */
export type Stage =
  | { readonly is: "empty" }
  | { readonly is: "opening" }
  | { readonly is: "reading"; readonly bytes: number }
  | { readonly is: "done" }
  | { readonly is: "refused"; readonly problem: Problem }
  | { readonly is: "stopped" }
  | { readonly is: "crashed"; readonly message: string };

export interface Session {
  readonly stage: Stage;
  readonly capture: Capture | null;
  readonly preview: CapturePreview | null;
  /** Counts up whenever the capture has grown. */
  readonly version: number;
  readonly stop: () => void;
  readonly again: () => void;
}

/**
 * Reads a source in the worker with these settings, anew whenever either changes. The page is told of growth once per frame
 * at most, however fast the blocks come. `settings` must keep its identity while it means the same.
 */
export function useSession(source: Source | null, settings: AnalysisSettings): Session {
  const [stage, setStage] = useState<Stage>({ is: "empty" });
  const [capture, setCapture] = useState<Capture | null>(null);
  const [preview, setPreview] = useState<CapturePreview | null>(null);
  const [version, setVersion] = useState(0);
  const [round, setRound] = useState(0);
  const client = useRef<DecodeClient | null>(null);

  // biome-ignore lint/correctness/useExhaustiveDependencies: a new round reads the same file again
  useEffect(() => {
    setCapture(null);
    if (!source) {
      setStage({ is: "empty" });
      setPreview(null);
      return;
    }
    const worker = new DecodeClient();
    client.current = worker;
    setStage({ is: "opening" });
    run(worker, source, settings, { setStage, setCapture, setPreview, grown: () => setVersion((now) => now + 1) });
    return () => {
      worker.stop();
      client.current = null;
    };
  }, [source, settings, round]);

  const stop = useCallback(() => {
    client.current?.stop();
    setStage({ is: "stopped" });
  }, []);
  const again = useCallback(() => setRound((now) => now + 1), []);
  return { stage, capture, preview, version, stop, again };
}

interface Told {
  setStage(stage: Stage): void;
  setCapture(capture: Capture): void;
  setPreview(preview: CapturePreview | null): void;
  grown(): void;
}

async function run(worker: DecodeClient, source: Source, settings: AnalysisSettings, told: Told): Promise<void> {
  const unlessStopped = (act: () => void) => {
    if (!worker.stopped) act();
  };
  try {
    if (source.kind === "file") {
      const preview = await worker.preview(source, settings.read);
      unlessStopped(() => told.setPreview(preview));
      if (preview.problem) {
        const { problem } = preview;
        unlessStopped(() => told.setStage({ is: "refused", problem }));
        return;
      }
    }
    await read(worker, source, settings, told, unlessStopped);
  } catch (error) {
    unlessStopped(() => told.setStage({ is: "crashed", message: error instanceof Error ? error.message : String(error) }));
  }
}

async function read(
  worker: DecodeClient,
  source: Source,
  settings: AnalysisSettings,
  told: Told,
  unlessStopped: (act: () => void) => void,
): Promise<void> {
  let capture: Capture | null = null;
  let bytes = 0;
  let frame = 0;
  const changed = () => {
    if (frame !== 0) return;
    frame = requestAnimationFrame(() => {
      frame = 0;
      unlessStopped(() => {
        told.grown();
        told.setStage({ is: "reading", bytes });
      });
    });
  };
  const outcome = await worker.analyse(source, settings, {
    head(head) {
      const made = new Capture(head);
      capture = made;
      unlessStopped(() => told.setCapture(made));
    },
    edges(block) {
      capture?.appendEdges(block);
      changed();
    },
    tap: (index, block) => capture?.appendTap(index, block),
    transactions(block, rows) {
      capture?.appendTransactions(block, rows);
      changed();
    },
    progress(now) {
      bytes = now;
      changed();
    },
  });
  cancelAnimationFrame(frame);
  frame = -1;
  unlessStopped(() => {
    if (!outcome.ok) {
      told.setStage({ is: "refused", problem: outcome.problem });
      return;
    }
    (capture as Capture | null)?.conclude(outcome);
    told.grown();
    told.setStage({ is: "done" });
  });
}
