import { proxy, type Remote, wrap } from "comlink";
import type { AnalysisListener, AnalysisOutcome, AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import type { DecodeApi, Source } from "@/workers/protocol";

/** Our own fault, never the file's: the worker could not be loaded, or threw. */
export class Crashed extends Error {
  override readonly name = "Crashed";
}

interface Running {
  readonly worker: Worker;
  readonly api: Remote<DecodeApi>;
  /** Rejects with Crashed when the worker dies. */
  readonly died: Promise<never>;
}

function start(): Running {
  const worker = new Worker(new URL("../../workers/decode.worker.ts", import.meta.url), { type: "module", name: "decode" });
  const died = new Promise<never>((_, reject) => {
    worker.onerror = (event) => reject(new Crashed(event.message || "The decoder could not be started."));
    worker.onmessageerror = () => reject(new Crashed("The decoder's answer could not be read."));
  });
  // Whoever asks next learns of it; a death while nobody asks is no unhandled rejection.
  died.catch(() => undefined);
  return { worker, api: wrap<DecodeApi>(worker), died };
}

/** A worker that was started before it was needed. */
let ready: Running | null = null;

/**
 * Starts a decoder for whoever will need one next and has it warm up, so that a file that is picked finds it loaded and compiled.
 * One that fails at this is given up: the client that needs one starts its own, and tells of the failure.
 */
export function makeReady(): void {
  if (ready !== null) return;
  const running = start();
  ready = running;
  Promise.race([running.api.warmUp(), running.died]).catch(() => {
    if (ready !== running) return;
    ready = null;
    running.worker.terminate();
  });
}

/**
 * One decode worker. Every promise it gives is kept: when the worker dies without an answer, all that is open rejects with
 * Crashed, so nothing waits for ever. Stopping ends the worker at once, whatever it is doing.
 */
export class DecodeClient {
  readonly #running: Running;
  #stopped = false;

  constructor() {
    this.#running = ready ?? start();
    ready = null;
  }

  get stopped(): boolean {
    return this.#stopped;
  }

  preview(source: Source, choices: ReadChoices): Promise<CapturePreview> {
    return this.#asked(this.#running.api.preview(source, choices));
  }

  analyse(source: Source, settings: AnalysisSettings, listener: AnalysisListener): Promise<AnalysisOutcome> {
    const ask = async (): Promise<AnalysisOutcome> => this.#running.api.analyse(source, settings, proxy(listener));
    return this.#asked(ask());
  }

  stop(): void {
    this.#stopped = true;
    this.#running.worker.terminate();
  }

  async #asked<T>(answer: Promise<T>): Promise<T> {
    try {
      return await Promise.race([answer, this.#running.died]);
    } catch (error) {
      if (error instanceof Crashed) throw error;
      throw new Crashed(error instanceof Error ? error.message : String(error));
    }
  }
}
