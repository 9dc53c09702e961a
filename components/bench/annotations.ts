// What people put on a capture, as the bench shows it, and what it may ask for. The case page and the share page fill these
// from the server; the front door has none.

/** A stretch of the record, in ticks. */
export interface Span {
  readonly from: number;
  readonly to: number;
}

/** What a note or a tag stands on: a transaction, a stretch of the record, or (a note only) the capture as a whole. */
export type Place = { readonly transaction: number } | { readonly span: Span } | null;

export interface BenchNote {
  readonly id: string;
  /** Footnote number in the case. */
  readonly number: number;
  readonly transaction: number | null;
  readonly span: Span | null;
  readonly text: string;
  readonly author: string;
  /** May the present reader change or delete it. */
  readonly mine: boolean;
}

export interface BenchTag {
  readonly id: string;
  readonly transaction: number | null;
  readonly span: Span | null;
  /** Id of its TagKind. */
  readonly kind: string;
  readonly author: string;
  readonly mine: boolean;
}

/** A category of the team's catalogue. */
export interface TagKind {
  readonly id: string;
  readonly name: string;
  /** The key that puts it, or null. */
  readonly key: string | null;
  readonly retired: boolean;
}

/** A device of the roster as far as the page names it. */
export interface BenchDevice {
  readonly address: number;
  readonly name: string;
}

/** Resolves to null when it was done, else to a sentence saying why not. */
export type Outcome = Promise<string | null>;

export interface BenchCase {
  readonly notes: readonly BenchNote[];
  readonly tags: readonly BenchTag[];
  readonly tagKinds: readonly TagKind[];
  readonly finding: string;
  readonly devices: readonly BenchDevice[];
  /** Absent functions are not offered: a share link is read-only, a support engineer may not tag. */
  readonly addNote?: (place: Place, text: string) => Outcome;
  readonly editNote?: (id: string, text: string) => Outcome;
  readonly removeNote?: (id: string) => Outcome;
  readonly addTag?: (place: NonNullable<Place>, kind: string) => Outcome;
  readonly removeTag?: (id: string) => Outcome;
  readonly saveFinding?: (text: string) => Outcome;
}

export const NO_CASE: BenchCase = { notes: [], tags: [], tagKinds: [], finding: "", devices: [] };

/** A stretch that carries a note or a tag. */
export interface NamedSpan extends Span {
  readonly kind: "note" | "tag";
  readonly label: string;
}

/** Notes and tags on stretches of the record, each with its footnote number or its word. */
export function spansOf({ notes, tags, tagKinds }: BenchCase): NamedSpan[] {
  const words = new Map(tagKinds.map((kind) => [kind.id, kind.name]));
  return [
    ...notes.flatMap(({ span, number }) => (span === null ? [] : [{ ...span, kind: "note" as const, label: String(number) }])),
    ...tags.flatMap(({ span, kind }) =>
      span === null ? [] : [{ ...span, kind: "tag" as const, label: words.get(kind) ?? "tag" }],
    ),
  ];
}
