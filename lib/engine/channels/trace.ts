// In: the first part of a capture, every usable channel. Out: the type in which readers hand each channel's behaviour to
// the channel finder.

/** Changes of one channel over the surveyed part of a capture. Struct of arrays over `length` changes. */
export interface LineTrace {
  readonly id: string;
  readonly name: string;
  /** Level at the start of the survey: 0, 1, or 2 for unknown. */
  readonly initial: 0 | 1 | 2;
  readonly length: number;
  readonly ticks: Float64Array;
  /** Level after each change: 0, 1, or 2 for unknown. */
  readonly levels: Uint8Array;
  /** Tick after which this line was no longer followed (a busy line fills its share); absent where the whole survey is held. */
  readonly until?: number;
}

/** What one ordering of a pair decodes to, for the preview a person confirms. */
export interface PairPreview {
  readonly scl: string;
  readonly sda: string;
  readonly transactions: number;
  readonly wholeBytes: number;
  /** START/STOP conditions inside a byte, and broken bytes: what a wrong ordering produces. */
  readonly breaks: number;
  /** First bytes as text, e.g. "S A0 A 01 A P". */
  readonly firstBytes: string;
}
