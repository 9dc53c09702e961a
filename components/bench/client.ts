import { proxy, type Remote, wrap } from "comlink";
import type { AnalysisListener, AnalysisOutcome, AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import type { DecodeApi, Source } from "@/workers/protocol";

/** Our own fault, never the file's: the worker could not be loaded, or threw. */
export class Crashed extends Error {
  override readonly name = "Crashed";
}

/**
 * One decode worker. Every promise it gives is kept: when the worker dies without an answer, all that is open rejects with
 * Crashed, so nothing waits for ever. Stopping ends the worker at once, whatever it is doing.
 */
export class DecodeClient {
  readonly #worker: Worker;
  readonly #api: Remote<DecodeApi>;
  readonly #died: Promise<never>;
  #stopped = false;

  constructor() {
    this.#worker = new Worker(new URL("../../workers/decode.worker.ts", import.meta.url), { type: "module", name: "decode" });
    this.#api = wrap<DecodeApi>(this.#worker);
    this.#died = new Promise((_, reject) => {
      this.#worker.onerror = (event) => reject(new Crashed(event.message || "The decoder could not be started."));
      this.#worker.onmessageerror = () => reject(new Crashed("The decoder's answer could not be read."));
    });
    // Whoever asks next learns of it; a death while nobody asks is no unhandled rejection.
    this.#died.catch(() => undefined);
  }

  get stopped(): boolean {
    return this.#stopped;
  }

  preview(source: Source, choices: ReadChoices): Promise<CapturePreview> {
    return this.#asked(this.#api.preview(source, choices));
  }

  analyse(source: Source, settings: AnalysisSettings, listener: AnalysisListener): Promise<AnalysisOutcome> {
    const ask = async (): Promise<AnalysisOutcome> => this.#api.analyse(source, settings, proxy(listener));
    return this.#asked(ask());
  }

  stop(): void {
    this.#stopped = true;
    this.#worker.terminate();
  }

  async #asked<T>(answer: Promise<T>): Promise<T> {
    try {
      return await Promise.race([answer, this.#died]);
    } catch (error) {
      if (error instanceof Crashed) throw error;
      throw new Crashed(error instanceof Error ? error.message : String(error));
    }
  }
}
