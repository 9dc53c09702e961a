import { SignPartsSchema } from "@/lib/case/upload";
import { signParts } from "@/lib/server/captures/upload";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const POST = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  input: SignPartsSchema,
  handle: ({ em, viewer, params, input }) => signParts(em, viewer, params.id, input),
});
