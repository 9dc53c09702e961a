import { EditNoteSchema, RemoveNoteSchema } from "@/lib/case/wire";
import { caseChildParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { editNote, removeNote } from "@/lib/server/notes/write";

export const PATCH = route({
  who: "member",
  action: "note.add",
  rate: "write",
  params: caseChildParams,
  input: EditNoteSchema,
  handle: async ({ em, viewer, params, input }) => ({ note: await editNote(em, viewer, params, input) }),
});

export const DELETE = route({
  who: "member",
  action: "note.add",
  rate: "write",
  params: caseChildParams,
  input: RemoveNoteSchema,
  handle: ({ em, viewer, params, input }) => removeNote(em, viewer, params, input.version),
});
