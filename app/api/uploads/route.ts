import { StartUploadSchema } from "@/lib/case/upload";
import { sweepSometimes } from "@/lib/server/captures/sweep";
import { listUploads, startUpload } from "@/lib/server/captures/upload";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "capture.upload",
  handle: async ({ em, viewer }) => ({ uploads: await listUploads(em, viewer) }),
});

export const POST = route({
  who: "member",
  action: "capture.upload",
  rate: "write",
  input: StartUploadSchema,
  handle: async ({ em, viewer, input }) => {
    sweepSometimes();
    return Response.json({ upload: await startUpload(em, viewer, input) }, { status: 201 });
  },
});
