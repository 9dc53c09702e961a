"use client";

import { useCallback, useEffect, useRef, useState } from "react";
import type { Problem } from "@/lib/base/result";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import { Capture } from "@/lib/view/capture";
import type { Source } from "@/workers/protocol";
import { DecodeClient } from "./client";
import { Growth } from "./growth";
import { unhurried } from "./unhurried";

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
  /** Counts up whenever the capture has grown and the page was told. */
  readonly version: number;
  readonly stop: () => void;
  readonly again: () => void;
}

/**
 * Reads a source in the worker with these settings, anew whenever either changes. The page is told of growth some
 * times a second, however fast the blocks come, and draws it in pieces between which it stays alive.
 * `settings` must keep its identity while it means the same.
 */
export function useSession(source: Source | null, settings: AnalysisSettings): Session {
  const [stage, setStage] = useState<Stage>({ is: "empty" });
  const [capture, setCapture] = useState<Capture | null>(null);
  const [preview, setPreview] = useState<CapturePreview | null>(null);
  const [version, setVersion] = useState(0);
  const [round, setRound] = useState(0);
  const client = useRef<DecodeClient | null>(null);
  const growth = useRef<Growth | null>(null);

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
    const reading = new Growth();
    growth.current = reading;
    run(worker, source, settings, reading, { setStage, setCapture, setPreview, grown: () => setVersion((now) => now + 1) });
    return () => {
      reading.close();
      worker.stop();
      client.current = null;
    };
  }, [source, settings, round]);

  // biome-ignore lint/correctness/useExhaustiveDependencies: told once the page shows this version
  useEffect(() => growth.current?.shown(), [version]);

  const stop = useCallback(() => {
    growth.current?.close();
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

async function run(worker: DecodeClient, source: Source, settings: AnalysisSettings, growth: Growth, told: Told): Promise<void> {
  const end = (stage: Stage) => {
    growth.close();
    if (!worker.stopped)
      unhurried(
        () => told.setStage(stage),
        () => !worker.stopped,
      );
  };
  try {
    let preview: Promise<void> | null = source.kind === "file" ? null : Promise.resolve();
    const look = () => {
      preview ??= previewed(source, settings, worker, told);
      return preview;
    };
    const stage = await read(worker, source, settings, growth, told, look);
    // A refusal is answered beside what the file looks like.
    const looked = look();
    if (stage.is === "refused") await looked;
    end(stage);
  } catch (error) {
    end({ is: "crashed", message: error instanceof Error ? error.message : String(error) });
  }
}

/** Asked of the worker that reads: it looks between two chunks, with a program that is compiled by then. */
async function previewed(source: Source, settings: AnalysisSettings, worker: DecodeClient, told: Told): Promise<void> {
  try {
    const preview = await worker.preview(source, settings.read);
    if (!worker.stopped)
      unhurried(
        () => told.setPreview(preview),
        () => !worker.stopped,
      );
  } catch {
    // It reads what the reading itself reads; what made it crash makes that crash, and is told there.
  }
}

async function read(
  worker: DecodeClient,
  source: Source,
  settings: AnalysisSettings,
  growth: Growth,
  told: Told,
  /** Asks how the file is understood: once the first rows are on their way to the page, which need not wait for that. */
  look: () => void,
): Promise<Stage> {
  const held: { capture: Capture | null } = { capture: null };
  let bytes = 0;
  let shown: "nothing" | "head" | "rows" = "nothing";
  let over = false;
  const tell = () => {
    const { capture } = held;
    if (worker.stopped || capture === null) return undefined;
    const wanted = () => !worker.stopped && !over;
    const grown = () => {
      told.grown();
      told.setStage({ is: "reading", bytes });
    };
    if (shown === "nothing") {
      shown = "head";
      return unhurried(() => {
        told.setCapture(capture);
        grown();
      }, wanted);
    }
    if (shown === "head" && capture.ledger.length > 0) {
      // Few rows, and what is waited for: nothing else goes before them.
      shown = "rows";
      grown();
      look();
      return undefined;
    }
    look();
    return unhurried(grown, wanted);
  };
  const changed = () => growth.ask(tell);
  const outcome = await worker.analyse(source, settings, {
    head(head) {
      held.capture = new Capture(head);
      changed();
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
  over = true;
  const { capture } = held;
  if (outcome.ok) capture?.conclude(outcome);
  if (capture && !worker.stopped) {
    unhurried(
      () => {
        told.setCapture(capture);
        told.grown();
      },
      () => !worker.stopped,
    );
  }
  return outcome.ok ? { is: "done" } : { is: "refused", problem: outcome.problem };
}
