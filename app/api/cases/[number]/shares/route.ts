import { CreateShareSchema } from "@/lib/case/wire";
import { caseParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { listShares } from "@/lib/server/shares/read";
import { createShare } from "@/lib/server/shares/write";

export const GET = route({
  who: "member",
  action: "case.read",
  params: caseParams,
  handle: async ({ em, viewer, params }) => ({ shares: await listShares(em, viewer, params.number) }),
});

export const POST = route({
  who: "member",
  action: "share.create",
  rate: "write",
  params: caseParams,
  input: CreateShareSchema,
  handle: async ({ em, viewer, params, input }) =>
    Response.json(await createShare(em, viewer, params.number, input), { status: 201 }),
});
