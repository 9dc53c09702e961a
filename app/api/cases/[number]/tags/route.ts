import { ChangeTagsSchema } from "@/lib/case/wire";
import { caseParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { changeTags } from "@/lib/server/tags/write";

export const POST = route({
  who: "member",
  action: "tag.add",
  rate: "write",
  params: caseParams,
  input: ChangeTagsSchema,
  handle: ({ em, viewer, params, input }) => changeTags(em, viewer, params.number, input),
});
