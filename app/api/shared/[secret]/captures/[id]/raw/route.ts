import { rawAddress } from "@/lib/server/captures/read";
import { secretCaptureParams } from "@/lib/server/http/params";
import { moved, route } from "@/lib/server/http/route";
import { settleLink } from "@/lib/server/shares/read";

/** The original, where whoever made the link allows it. */
export const GET = route({
  who: "anyone",
  action: "capture.download",
  params: secretCaptureParams,
  settle: (caller, params) => settleLink(params.secret, caller.cookie),
  handle: async ({ em, viewer, params }) => moved(await rawAddress(em, viewer, params.id)),
});
