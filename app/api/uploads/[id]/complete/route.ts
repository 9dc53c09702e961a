import { CompleteUploadSchema } from "@/lib/case/upload";
import { completeUpload } from "@/lib/server/captures/complete";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const POST = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  input: CompleteUploadSchema,
  handle: async ({ em, viewer, params, input }) => ({ capture: await completeUpload(em, viewer, params.id, input) }),
});
