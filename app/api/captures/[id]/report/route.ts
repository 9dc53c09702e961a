import { reportOf } from "@/lib/server/captures/report";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  rate: "report",
  params: idParams,
  handle: ({ em, viewer, params }) => reportOf(em, viewer, params.id),
});
