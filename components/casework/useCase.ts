"use client";

import { useCallback, useState } from "react";
import useSWR from "swr";
import type { Anchor, NoteFile } from "@/lib/case/case";
import {
  type CaseView,
  CaseViewSchema,
  type ChangeTags,
  type EditCase,
  NoteAnswerSchema,
  TagsAnswerSchema,
} from "@/lib/case/wire";
import { ApiProblem, ask, wordsOf } from "./api";

/** What somebody else saved while this person was writing. Both stay until the person has chosen. */
export type Conflict =
  | { readonly of: "case"; readonly mine: EditFields; readonly theirs: CaseView }
  | { readonly of: "note"; readonly mine: string; readonly theirs: NoteFile };

export type EditFields = Omit<EditCase, "version">;

export interface CaseHandle {
  readonly view: CaseView;
  /** Sentence of the last thing that did not go through; null after the next that did. */
  readonly trouble: string | null;
  readonly conflict: Conflict | null;
  /** True when saved; false leaves `trouble` or `conflict` behind. */
  edit(fields: EditFields): Promise<boolean>;
  addNote(capture: string | null, anchor: Anchor, text: string): Promise<boolean>;
  editNote(note: NoteFile, text: string): Promise<boolean>;
  removeNote(note: NoteFile): Promise<boolean>;
  changeTags(change: ChangeTags): Promise<boolean>;
  /** Ends a conflict: saves one's own text over the other, or takes theirs. */
  settle(choice: "mine" | "theirs"): Promise<boolean>;
  refresh(): Promise<void>;
  dismissTrouble(): void;
}

/** One case as this page holds it: read again when the window comes back, written field by field, nothing lost silently. */
export function useCase(initial: CaseView): CaseHandle {
  const path = `/api/cases/${initial.number}`;
  const { data, mutate } = useSWR(path, () => ask({ path, answer: CaseViewSchema }), {
    fallbackData: initial,
    revalidateOnMount: false,
  });
  const view = data ?? initial;
  const [trouble, setTrouble] = useState<string | null>(null);
  const [conflict, setConflict] = useState<Conflict | null>(null);

  const refresh = useCallback(async () => {
    await mutate();
  }, [mutate]);

  // Runs one change; a stale one becomes a conflict where `onStale` can make one of it.
  const attempt = async (change: () => Promise<unknown>, onStale?: (theirs: unknown) => Conflict | null): Promise<boolean> => {
    try {
      await change();
      setTrouble(null);
      setConflict(null);
      return true;
    } catch (error) {
      const found = error instanceof ApiProblem && error.code === "stale" ? (onStale?.(error.theirs) ?? null) : null;
      if (found) setConflict(found);
      else setTrouble(wordsOf(error));
      return false;
    }
  };

  const edit = (fields: EditFields, version = view.version) =>
    attempt(
      async () => {
        await mutate(await ask({ method: "PATCH", path, body: { version, ...fields }, answer: CaseViewSchema }), {
          revalidate: false,
        });
      },
      (theirs) => {
        const parsed = CaseViewSchema.safeParse(theirs);
        return parsed.success ? { of: "case", mine: fields, theirs: parsed.data } : null;
      },
    );

  // On the case as it stands by then: while the server answered, a capture may have arrived or been read.
  const put = (change: (now: CaseView) => CaseView) => mutate((now) => change(now ?? view), { revalidate: false });

  const keepNote = (note: NoteFile) =>
    put((now) => {
      const others = now.notes.filter((other) => other.id !== note.id);
      return { ...now, notes: [...others, note].sort((a, b) => a.number - b.number) };
    });

  const editNote = (note: NoteFile, text: string) =>
    attempt(
      async () => {
        const body = { version: note.version, text };
        const answer = await ask({ method: "PATCH", path: `${path}/notes/${note.id}`, body, answer: NoteAnswerSchema });
        await keepNote(answer.note);
      },
      (theirs) => {
        const parsed = NoteAnswerSchema.safeParse(theirs);
        return parsed.success ? { of: "note", mine: text, theirs: parsed.data.note } : null;
      },
    );

  return {
    view,
    trouble,
    conflict,
    edit: (fields) => edit(fields),
    editNote,
    refresh,
    dismissTrouble: () => setTrouble(null),
    addNote: (capture, anchor, text) =>
      attempt(async () => {
        const body = { capture, anchor, text };
        const answer = await ask({ method: "POST", path: `${path}/notes`, body, answer: NoteAnswerSchema });
        await keepNote(answer.note);
      }),
    removeNote: (note) =>
      attempt(async () => {
        await ask({ method: "DELETE", path: `${path}/notes/${note.id}`, body: { version: note.version } });
        await put((now) => ({ ...now, notes: now.notes.filter((other) => other.id !== note.id) }));
      }),
    changeTags: (change) =>
      attempt(async () => {
        const { added, removed } = await ask({ method: "POST", path: `${path}/tags`, body: change, answer: TagsAnswerSchema });
        const gone = new Set([...removed, ...added.map((tag) => tag.id)]);
        await put((now) => ({ ...now, tags: [...now.tags.filter((tag) => !gone.has(tag.id)), ...added] }));
      }),
    settle: async (choice) => {
      if (conflict === null) return true;
      if (choice === "theirs") {
        setConflict(null);
        await refresh();
        return true;
      }
      return conflict.of === "case" ? edit(conflict.mine, conflict.theirs.version) : editNote(conflict.theirs, conflict.mine);
    },
  };
}
