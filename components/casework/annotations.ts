import type { BenchCase, Outcome, Place, Span } from "@/components/bench/annotations";
import type { Anchor, CaseFile, FaultTagFile } from "@/lib/case/case";
import type { Action } from "@/lib/case/roles";
import type { CaseHandle } from "./useCase";

const SAVED = null;
const ELSEWHERE = "It was not saved; see the notice above.";

function placed(anchor: Anchor): { readonly transaction: number | null; readonly span: Span | null } {
  return {
    transaction: anchor.kind === "transaction" ? anchor.transaction : null,
    span: anchor.kind === "range" ? { from: anchor.from_tick, to: anchor.to_tick } : null,
  };
}

function anchorOf(place: Place): Anchor {
  if (place === null) return { kind: "whole" };
  if ("transaction" in place) return { kind: "transaction", transaction: place.transaction };
  return { kind: "range", from_tick: Math.round(place.span.from), to_tick: Math.round(place.span.to) };
}

/** Notes, tags and finding of one capture, as anybody may read them. */
export function readOnly(
  file: Pick<CaseFile, "notes" | "tags" | "finding" | "roster" | "fault_tags">,
  capture: string | null,
): BenchCase {
  return {
    notes: file.notes
      .filter((note) => note.capture === capture || note.capture === null)
      .map((note) => ({
        id: note.id,
        number: note.number,
        ...placed(note.anchor),
        text: note.text,
        author: note.author,
        mine: false,
      })),
    tags: file.tags
      .filter((tag) => tag.capture === capture)
      .map((tag) => ({
        id: tag.id,
        ...placed(tag.anchor),
        kind: tag.fault_tag,
        author: tag.author,
        mine: false,
      })),
    tagKinds: file.fault_tags,
    finding: file.finding,
    devices: file.roster.flatMap((row) =>
      row.role === "target" && row.address !== null ? [{ address: row.address, name: row.name }] : [],
    ),
  };
}

/** The same with what this member may do. `me` is the member's name, `catalogue` the team's fault tags. */
export function editable(handle: CaseHandle, capture: string | null, me: string, catalogue: readonly FaultTagFile[]): BenchCase {
  const { view } = handle;
  const may = (action: Action) => view.may.includes(action);
  const told = async (done: Promise<boolean>): Outcome => ((await done) ? SAVED : ELSEWHERE);
  const plain = readOnly(view, capture);
  const own = (author: string) => author === me || may("case.edit");
  const noteOf = (id: string) => view.notes.find((note) => note.id === id);
  const noted = (id: string, act: (note: (typeof view.notes)[number]) => Promise<boolean>): Outcome => {
    const note = noteOf(id);
    return note ? told(act(note)) : Promise.resolve("This note is gone.");
  };
  const known = new Set(catalogue.map((tag) => tag.id));
  return {
    ...plain,
    notes: plain.notes.map((note) => ({ ...note, mine: own(note.author) })),
    tags: plain.tags.map((tag) => ({ ...tag, mine: own(tag.author) })),
    tagKinds: [...catalogue, ...view.fault_tags.filter((tag) => !known.has(tag.id))],
    ...(may("note.add") && {
      addNote: (place, text) => told(handle.addNote(place === null ? null : capture, anchorOf(place), text)),
      editNote: (id, text) => noted(id, (note) => handle.editNote(note, text)),
      removeNote: (id) => noted(id, handle.removeNote),
    }),
    ...(may("tag.add") &&
      capture !== null && {
        addTag: (place, kind) => told(handle.changeTags({ add: [{ capture, fault_tag: kind, anchor: anchorOf(place) }] })),
        removeTag: (id) => told(handle.changeTags({ remove: [id] })),
      }),
    ...(may("finding.write") && { saveFinding: (text) => told(handle.edit({ finding: text })) }),
  };
}
