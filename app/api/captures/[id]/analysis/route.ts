import { StoreAnalysisSchema } from "@/lib/case/upload";
import { storeAnalysis } from "@/lib/server/captures/analysis";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const PUT = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  input: StoreAnalysisSchema,
  handle: async ({ em, viewer, params, input }) => ({ capture: await storeAnalysis(em, viewer, params.id, input) }),
});
