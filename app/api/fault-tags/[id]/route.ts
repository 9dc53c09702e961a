import { EditFaultTagSchema } from "@/lib/case/catalogue";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { editFaultTag } from "@/lib/server/tags/catalogue";

export const PATCH = route({
  who: "member",
  action: "catalogue.edit",
  rate: "write",
  params: idParams,
  input: EditFaultTagSchema,
  handle: async ({ em, viewer, params, input }) => ({ fault_tag: await editFaultTag(em, viewer, params.id, input) }),
});
