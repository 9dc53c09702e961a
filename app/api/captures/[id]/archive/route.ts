import { StartArchiveSchema } from "@/lib/case/upload";
import { startArchive } from "@/lib/server/captures/analysis";
import { archiveAddress } from "@/lib/server/captures/read";
import { idParams } from "@/lib/server/http/params";
import { moved, route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  params: idParams,
  handle: async ({ em, viewer, params }) => moved(await archiveAddress(em, viewer, params.id)),
});

export const POST = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  params: idParams,
  input: StartArchiveSchema,
  handle: ({ em, viewer, params, input }) => startArchive(em, viewer, params.id, input),
});
