import { CaseQuerySchema, CreateCaseSchema } from "@/lib/case/wire";
import { listCases } from "@/lib/server/cases/list";
import { createCase } from "@/lib/server/cases/write";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  input: CaseQuerySchema,
  handle: ({ em, viewer, input }) => listCases(em, viewer, input),
});

export const POST = route({
  who: "member",
  action: "case.create",
  rate: "write",
  input: CreateCaseSchema,
  handle: async ({ em, viewer, input }) => Response.json(await createCase(em, viewer, input), { status: 201 }),
});
