// In: nothing. Out: what the page may ask of the decode worker and what it is told. Edges are transferred, never copied: the
// worker's own arrays are gone once they were sent. "Refused" is the user's file; a call that throws is our own fault.

import type { Result } from "@/lib/base/result";
import type { AnalysisListener, AnalysisOutcome, AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";

/** What is read: a picked file, or an edge archive as it came from storage. */
export interface Source {
  readonly kind: "file" | "archive";
  readonly blob: Blob;
  readonly name: string;
}

export interface DecodeApi {
  /** Makes itself ready for a file that may come; ends early once one is there. */
  warmUp(): Promise<void>;
  /** How the file is understood, before it is read. */
  preview(source: Source, choices: ReadChoices): Promise<CapturePreview>;
  /** Reads and analyses the whole capture; the listener is a comlink proxy. */
  analyse(source: Source, settings: AnalysisSettings, listener: AnalysisListener): Promise<AnalysisOutcome>;
}

export interface ArchiveApi {
  /** The edge archive of a file, or why the file cannot be read. */
  archive(source: Source, choices: ReadChoices): Promise<Result<Uint8Array<ArrayBuffer>>>;
}

/** The buffers of a struct of arrays, to be transferred with it. */
export function buffersOf(...structs: readonly (object | null)[]): ArrayBuffer[] {
  const found = new Set<ArrayBuffer>();
  for (const struct of structs) {
    for (const value of Object.values(struct ?? {})) {
      if (ArrayBuffer.isView(value) && value.buffer instanceof ArrayBuffer) found.add(value.buffer);
    }
  }
  return [...found];
}
