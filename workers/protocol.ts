// In: nothing. Out: what the page may ask of the decode worker and what it is told. Blocks are transferred, never copied: the
// worker's own arrays are gone once they were sent. "Refused" is the user's file; a call that throws is our own fault.

import type { Problem } from "@/lib/base/result";
import type { AnalysisListener, AnalysisOutcome, AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { PairPreview } from "@/lib/engine/channels/trace";
import type { CaptureHead, ReadChoices } from "@/lib/engine/samples/reader";

/** Where the bytes come from: a picked file, or an edge archive that is fetched. */
export type Source =
  | { readonly kind: "file"; readonly file: File }
  | { readonly kind: "archive"; readonly url: string; readonly name: string };

/** What the file is, before it is read: the head and what both orders of its lines decode to. */
export type Survey =
  | { readonly ok: true; readonly head: CaptureHead; readonly previews: readonly PairPreview[] }
  | { readonly ok: false; readonly problem: Problem };

export interface DecodeApi {
  survey(source: Source, choices: ReadChoices): Promise<Survey>;
  /** Reads and analyses the whole capture; the listener is a comlink proxy. */
  analyse(source: Source, settings: AnalysisSettings, listener: AnalysisListener): Promise<AnalysisOutcome>;
}
