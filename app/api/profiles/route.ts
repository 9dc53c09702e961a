import { SaveProfileSchema } from "@/lib/case/catalogue";
import { route } from "@/lib/server/http/route";
import { listProfiles } from "@/lib/server/profiles/read";
import { addProfile } from "@/lib/server/profiles/write";

export const GET = route({
  who: "member",
  action: "case.read",
  handle: async ({ em, viewer }) => ({ profiles: await listProfiles(em, viewer) }),
});

export const POST = route({
  who: "member",
  action: "profile.edit",
  rate: "write",
  input: SaveProfileSchema,
  handle: async ({ em, viewer, input }) => Response.json({ profile: await addProfile(em, viewer, input) }, { status: 201 }),
});
