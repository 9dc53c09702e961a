import { reportOf } from "@/lib/server/captures/report";
import { secretCaptureParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { settleLink } from "@/lib/server/shares/read";

export const GET = route({
  who: "anyone",
  action: "case.read",
  rate: "report",
  params: secretCaptureParams,
  settle: (caller, params) => settleLink(params.secret, caller.cookie),
  handle: ({ em, viewer, params }) => reportOf(em, viewer, params.id),
});
