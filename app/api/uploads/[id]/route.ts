import { cancelUpload, readUpload } from "@/lib/server/captures/upload";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "capture.upload",
  params: idParams,
  handle: async ({ em, viewer, params }) => ({ upload: await readUpload(em, viewer, params.id) }),
});

export const DELETE = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  handle: ({ em, viewer, params }) => cancelUpload(em, viewer, params.id),
});
