import { removeCapture } from "@/lib/server/captures/remove";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const DELETE = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  handle: ({ em, viewer, params }) => removeCapture(em, viewer, params.id),
});
