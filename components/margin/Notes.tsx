"use client";

import { type RefObject, useState } from "react";
import type { BenchCase, BenchNote, Place, Span } from "@/components/bench/annotations";
import { Button } from "@/components/ui/Button";
import { TextField } from "@/components/ui/Field";
import type { Timebase } from "@/lib/base/time";
import { count, instant, span } from "@/lib/view/format";
import { MarginHead } from "./MarginHead";

export interface NotesProps {
  of: BenchCase;
  selected: number | null;
  /** The stretch that the strip shows, while it is the open reading. */
  span: Span | null;
  base: Timebase;
  onGo: (transaction: number) => void;
  onSpan: (span: Span) => void;
  /** The field for a new note, so that a key can reach it. */
  field: RefObject<HTMLTextAreaElement | null>;
}

/** Numbered footnotes: the number stands on the trace, the text here. */
export function Notes({ of, selected, span, base, onGo, onSpan, field }: NotesProps) {
  if (of.notes.length === 0 && !of.addNote) return null;
  return (
    <section>
      <MarginHead>Notes</MarginHead>
      <ol className="mt-2 space-y-3">
        {of.notes.map((note) => (
          <NoteItem
            key={note.id}
            note={note}
            of={of}
            base={base}
            onGo={onGo}
            onSpan={onSpan}
            current={note.transaction !== null && note.transaction === selected}
          />
        ))}
      </ol>
      {of.addNote && <NewNote add={of.addNote} selected={selected} span={span} base={base} field={field} />}
    </section>
  );
}

function NoteItem({
  note,
  of,
  base,
  onGo,
  onSpan,
  current,
}: {
  note: BenchNote;
  of: BenchCase;
  base: Timebase;
  onGo: (index: number) => void;
  onSpan: (span: Span) => void;
  current: boolean;
}) {
  const [editing, setEditing] = useState<string | null>(null);
  const [error, setError] = useState("");
  const { transaction, span: stretch } = note;

  async function save() {
    if (editing === null || !of.editNote) return;
    const refused = await of.editNote(note.id, editing);
    setError(refused ?? "");
    if (!refused) setEditing(null);
  }

  return (
    <li className={`pl-4 font-serif text-body ${current ? "-ml-[9px] border-l-[3px] border-accent pl-[22px]" : ""}`}>
      {editing === null ? (
        <p className="-indent-4 whitespace-pre-wrap">
          <sup className="mr-1 font-sans text-[0.6875rem] font-semibold text-accent">{note.number}</sup>
          {note.text}
        </p>
      ) : (
        <>
          <TextField
            label={`Note ${note.number}`}
            value={editing}
            onChange={(event) => setEditing(event.target.value)}
            error={error}
          />
          <div className="flex gap-4">
            <Button look="word" onClick={save}>
              save
            </Button>
            <Button look="word" onClick={() => setEditing(null)}>
              leave as it was
            </Button>
          </div>
        </>
      )}
      <p className="flex flex-wrap gap-x-3 font-sans text-small text-quiet">
        {note.author}
        {transaction !== null && (
          <button type="button" onClick={() => onGo(transaction)} className="border-b border-field hover:text-ink">
            {count(transaction)}
          </button>
        )}
        {stretch !== null && (
          <button type="button" onClick={() => onSpan(stretch)} className="tabular border-b border-field hover:text-ink">
            {span(stretch.to - stretch.from, base)} from {instant(stretch.from, base, 6)}
          </button>
        )}
        {note.mine && of.editNote && editing === null && (
          <button
            type="button"
            onClick={() => setEditing(note.text)}
            className="screen-only border-b border-field hover:text-ink"
          >
            change
          </button>
        )}
        {note.mine && of.removeNote && (
          <button
            type="button"
            onClick={() => of.removeNote?.(note.id)}
            className="screen-only border-b border-field hover:text-ink"
          >
            delete
          </button>
        )}
      </p>
    </li>
  );
}

function placeWords(place: Place, base: Timebase): string {
  if (place === null) return "Note on the whole capture";
  if ("transaction" in place) return `Note on ${count(place.transaction)}`;
  return `Note on the ${span(place.span.to - place.span.from, base)} shown`;
}

interface NewNoteProps {
  add: NonNullable<BenchCase["addNote"]>;
  selected: number | null;
  span: Span | null;
  base: Timebase;
  field: RefObject<HTMLTextAreaElement | null>;
}

function NewNote({ add, selected, span: shown, base, field }: NewNoteProps) {
  const place: Place = selected !== null ? { transaction: selected } : shown !== null ? { span: shown } : null;
  const [text, setText] = useState("");
  const [error, setError] = useState("");
  const [busy, setBusy] = useState(false);

  async function save() {
    if (text.trim() === "") return;
    setBusy(true);
    const refused = await add(place, text.trim());
    setBusy(false);
    setError(refused ?? "");
    if (!refused) setText("");
  }

  return (
    <form
      className="screen-only mt-3"
      onSubmit={(event) => {
        event.preventDefault();
        save();
      }}
    >
      <div>
        <label className="block font-sans text-label text-quiet">
          {placeWords(place, base)}
          <textarea
            ref={field}
            rows={2}
            value={text}
            onChange={(event) => setText(event.target.value)}
            onKeyDown={(event) => {
              const sent = event.key === "Enter" && (event.ctrlKey || event.metaKey);
              if (sent) save();
              // Back to the stack, where the keys move on.
              if (sent || event.key === "Escape") event.currentTarget.blur();
            }}
            className="mt-1 w-full resize-y border-0 border-b border-field bg-transparent font-serif text-body text-ink hover:border-ink"
          />
        </label>
      </div>
      <p aria-live="polite" className="font-sans text-small text-broken">
        {error}
      </p>
      {text.trim() !== "" && (
        <Button look="word" type="submit" busy={busy}>
          add note
        </Button>
      )}
    </form>
  );
}
