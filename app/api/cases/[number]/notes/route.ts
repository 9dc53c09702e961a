import { AddNoteSchema } from "@/lib/case/wire";
import { caseParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { addNote } from "@/lib/server/notes/write";

export const POST = route({
  who: "member",
  action: "note.add",
  rate: "write",
  params: caseParams,
  input: AddNoteSchema,
  handle: async ({ em, viewer, params, input }) =>
    Response.json({ note: await addNote(em, viewer, params.number, input) }, { status: 201 }),
});
