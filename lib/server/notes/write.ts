import "server-only";
import { LockMode } from "@mikro-orm/core";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import type { Case } from "@/entities/case";
import { Note } from "@/entities/note";
import { User } from "@/entities/user";
import type { NoteFile } from "@/lib/case/case";
import type { AddNoteSchema, EditNoteSchema } from "@/lib/case/wire";
import { type MemberViewer, may } from "@/lib/server/access/viewer";
import { demand, findCase } from "@/lib/server/access/visible";
import { record } from "@/lib/server/cases/events";
import { noteFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

/** Adds a footnote under the case's next number. */
export async function addNote(
  em: EntityManager,
  viewer: MemberViewer,
  number: number,
  input: z.output<typeof AddNoteSchema>,
): Promise<NoteFile> {
  demand(viewer, "note.add");
  return em.transactional(async (tx) => {
    const row = await findCase(tx, viewer, number);
    if (input.capture !== null) await findCaptureOf(tx, row, input.capture);
    const [{ given }]: { given: number }[] = await tx.execute(
      "update cases set next_note = next_note + 1 where id = ? returning next_note - 1 as given",
      [row.id],
    );
    const note = tx.create(Note, {
      case: row,
      capture: input.capture === null ? null : tx.getReference(Capture, input.capture),
      number: given,
      anchor: input.anchor,
      text: input.text,
      author: tx.getReference(User, viewer.user.id),
    });
    await tx.flush();
    await record(tx, row.id, viewer, { kind: "note.added", words: `wrote note ${given}`, after: { text: input.text } });
    return noteFile(note, viewer.user.name);
  });
}

/** A capture of this very case; another case's capture is a mistake in the request. */
async function findCaptureOf(em: EntityManager, row: Case, capture: string): Promise<void> {
  const found = await em.count(Capture, { id: capture, case: row.id });
  if (found === 0) throw new Refusal("input-invalid", { fields: { capture: "is not a capture of this case" } });
}

/** Changes the text. A note somebody has changed meanwhile answers "stale" with the text that stands there. */
export async function editNote(
  em: EntityManager,
  viewer: MemberViewer,
  at: { readonly number: number; readonly id: string },
  input: z.output<typeof EditNoteSchema>,
): Promise<NoteFile> {
  return em.transactional(async (tx) => {
    const note = await lockNote(tx, viewer, at, input.version);
    const before = note.text;
    if (before !== input.text) {
      note.text = input.text;
      note.editedAt = new Date();
      await tx.flush();
      await record(tx, note.case.id, viewer, {
        kind: "note.edited",
        words: `changed note ${note.number}`,
        before: { text: before },
        after: { text: input.text },
      });
    }
    return noteFile(note, authorOf(note));
  });
}

/** Removes a note; its text stays in the trail and its number is not given again. */
export async function removeNote(
  em: EntityManager,
  viewer: MemberViewer,
  at: { readonly number: number; readonly id: string },
  version: number,
): Promise<void> {
  await em.transactional(async (tx) => {
    const note = await lockNote(tx, viewer, at, version);
    await record(tx, note.case.id, viewer, {
      kind: "note.removed",
      words: `removed note ${note.number}`,
      before: { text: note.text, anchor: note.anchor },
    });
    tx.remove(note);
  });
}

function authorOf(note: Note): string {
  return note.author?.getEntity().name ?? "a former member";
}

/** The note, locked, for its author or somebody who may edit the case; only on the version that was read. */
async function lockNote(
  em: EntityManager,
  viewer: MemberViewer,
  at: { readonly number: number; readonly id: string },
  version: number,
): Promise<Note> {
  demand(viewer, "note.add");
  const row = await findCase(em, viewer, at.number);
  const found = await em.findOne(Note, { id: at.id, case: row.id }, { lockMode: LockMode.PESSIMISTIC_WRITE, refresh: true });
  if (!found) throw new Refusal("not-found", { detail: `note ${at.id}` });
  await em.populate(found, ["author"]);
  if (found.author?.id !== viewer.user.id && !may(viewer, "case.edit")) {
    throw new Refusal("forbidden", { words: "Only its author, or somebody who may edit the case, changes a note." });
  }
  if (found.version !== version) {
    throw new Refusal("stale", {
      words: `Somebody else changed note ${found.number} in the meantime. Both texts are kept; compare them and save again.`,
      theirs: noteFile(found, authorOf(found)),
    });
  }
  return found;
}
