import { EditShareSchema } from "@/lib/case/wire";
import { caseChildParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { editShare, revokeShare } from "@/lib/server/shares/write";

export const PATCH = route({
  who: "member",
  action: "share.create",
  rate: "write",
  params: caseChildParams,
  input: EditShareSchema,
  handle: async ({ em, viewer, params, input }) => ({ share: await editShare(em, viewer, params, input) }),
});

/** Revokes; the row stays, so that the trail can name it. */
export const DELETE = route({
  who: "member",
  action: "share.revoke",
  rate: "write",
  params: caseChildParams,
  handle: async ({ em, viewer, params }) => ({ share: await revokeShare(em, viewer, params) }),
});
