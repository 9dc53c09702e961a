import { ReplaceProfileSchema } from "@/lib/case/catalogue";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { findProfile, profileView } from "@/lib/server/profiles/read";
import { replaceProfile, retireProfile } from "@/lib/server/profiles/write";

export const GET = route({
  who: "member",
  action: "case.read",
  params: idParams,
  handle: async ({ em, viewer, params }) => ({ profile: profileView(await findProfile(em, viewer, params.id)) }),
});

export const PUT = route({
  who: "member",
  action: "profile.edit",
  rate: "write",
  params: idParams,
  input: ReplaceProfileSchema,
  handle: async ({ em, viewer, params, input }) => ({ profile: await replaceProfile(em, viewer, params.id, input) }),
});

/** Puts it away; cases judged by it keep it. */
export const DELETE = route({
  who: "member",
  action: "profile.edit",
  rate: "write",
  params: idParams,
  handle: ({ em, viewer, params }) => retireProfile(em, viewer, params.id),
});
