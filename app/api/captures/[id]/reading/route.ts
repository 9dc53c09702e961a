import { AnalyseSchema } from "@/lib/case/upload";
import { analyseOriginal } from "@/lib/server/captures/analysis";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const PUT = route({
  who: "member",
  action: "capture.upload",
  rate: "report",
  params: idParams,
  input: AnalyseSchema,
  handle: async ({ em, viewer, params, input }) => ({ capture: await analyseOriginal(em, viewer, params.id, input) }),
});
