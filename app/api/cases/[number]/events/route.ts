import { readEvents } from "@/lib/server/cases/read";
import { caseParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  params: caseParams,
  handle: async ({ em, viewer, params }) => ({ events: await readEvents(em, viewer, params.number) }),
});
