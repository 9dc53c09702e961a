import { EditCaseSchema } from "@/lib/case/wire";
import { readCase } from "@/lib/server/cases/read";
import { deleteCase, editCase } from "@/lib/server/cases/write";
import { caseParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  params: caseParams,
  handle: ({ em, viewer, params }) => readCase(em, viewer, params.number),
});

// The door asks for the least; each field is asked for by itself.
export const PATCH = route({
  who: "member",
  action: "case.read",
  rate: "write",
  params: caseParams,
  input: EditCaseSchema,
  handle: ({ em, viewer, params, input }) => editCase(em, viewer, params.number, input),
});

export const DELETE = route({
  who: "member",
  action: "case.delete",
  rate: "write",
  params: caseParams,
  handle: ({ em, viewer, params }) => deleteCase(em, viewer, params.number),
});
