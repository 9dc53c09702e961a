import { archiveAddress } from "@/lib/server/captures/read";
import { secretCaptureParams } from "@/lib/server/http/params";
import { moved, route } from "@/lib/server/http/route";
import { settleLink } from "@/lib/server/shares/read";

export const GET = route({
  who: "anyone",
  action: "case.read",
  params: secretCaptureParams,
  settle: (caller, params) => settleLink(params.secret, caller.cookie),
  handle: async ({ em, viewer, params }) => moved(await archiveAddress(em, viewer, params.id)),
});
