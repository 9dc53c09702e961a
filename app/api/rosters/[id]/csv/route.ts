import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { exportRoster } from "@/lib/server/rosters/csv";

export const GET = route({
  who: "member",
  action: "case.read",
  params: idParams,
  handle: ({ em, viewer, params }) => exportRoster(em, viewer, params.id),
});
