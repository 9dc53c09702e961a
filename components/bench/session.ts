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
 * Reads a source in the worker with these settings, anew whenever either changes. The page is told of growth some
 * times a second, however fast the blocks come. `settings` must keep its identity while it means the same.
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
  const frames = new Frames();
  const end = (stage: Stage) => {
    frames.close();
    if (!worker.stopped) told.setStage(stage);
  };
  try {
    // In a worker of its own, so that the first rows need not wait for it; a file that cannot be read is refused by the reading.
    const preview = source.kind === "file" ? previewed(source, settings, worker, told) : null;
    const stage = await read(worker, source, settings, told, frames);
    // A refusal is answered beside what the file looks like.
    if (stage.is === "refused") await preview;
    end(stage);
  } catch (error) {
    end({ is: "crashed", message: error instanceof Error ? error.message : String(error) });
  }
}

async function previewed(source: Source, settings: AnalysisSettings, worker: DecodeClient, told: Told): Promise<void> {
  const beside = new DecodeClient();
  try {
    const preview = await beside.preview(source, settings.read);
    if (!worker.stopped) told.setPreview(preview);
  } catch {
    // It reads what the reading itself reads; what made it crash makes that crash, and is told there.
  } finally {
    beside.stop();
  }
}

/** The page is told of growth at once the first time, then at most so often: reading is to be watched, not to be slowed. */
const PACE_MS = 100;

/** Runs one of many calls now and then, the last one never lost, and none after it was closed. */
class Frames {
  #timer: ReturnType<typeof setTimeout> | undefined;
  #last = Number.NEGATIVE_INFINITY;
  #closed = false;

  ask(act: () => void): void {
    if (this.#closed || this.#timer !== undefined) return;
    const wait = Math.max(0, this.#last + PACE_MS - performance.now());
    this.#timer = setTimeout(() => {
      this.#timer = undefined;
      this.#last = performance.now();
      act();
    }, wait);
  }

  close(): void {
    this.#closed = true;
    clearTimeout(this.#timer);
  }
}

async function read(
  worker: DecodeClient,
  source: Source,
  settings: AnalysisSettings,
  told: Told,
  frames: Frames,
): Promise<Stage> {
  const held: { capture: Capture | null } = { capture: null };
  let bytes = 0;
  const changed = () =>
    frames.ask(() => {
      if (worker.stopped) return;
      told.grown();
      told.setStage({ is: "reading", bytes });
    });
  const outcome = await worker.analyse(source, settings, {
    head(head) {
      held.capture = new Capture(head);
      if (!worker.stopped) told.setCapture(held.capture);
    },
    edges(block) {
      held.capture?.appendEdges(block);
      changed();
    },
    tap: (index, block) => held.capture?.appendTap(index, block),
    transactions(block, rows) {
      held.capture?.appendTransactions(block, rows);
      changed();
    },
    progress(now) {
      bytes = now;
      changed();
    },
  });
  if (!outcome.ok) return { is: "refused", problem: outcome.problem };
  held.capture?.conclude(outcome);
  if (!worker.stopped) told.grown();
  return { is: "done" };
}
