import { rawAddress } from "@/lib/server/captures/read";
import { idParams } from "@/lib/server/http/params";
import { moved, route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "capture.download",
  params: idParams,
  handle: async ({ em, viewer, params }) => moved(await rawAddress(em, viewer, params.id)),
});
