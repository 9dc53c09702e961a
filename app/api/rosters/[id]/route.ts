import { ReplaceRosterSchema } from "@/lib/case/catalogue";
import { idParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { findRoster, rosterView } from "@/lib/server/rosters/read";
import { removeRoster, replaceRoster } from "@/lib/server/rosters/write";

export const GET = route({
  who: "member",
  action: "case.read",
  params: idParams,
  handle: async ({ em, viewer, params }) => ({ roster: rosterView(await findRoster(em, viewer, params.id)) }),
});

export const PUT = route({
  who: "member",
  action: "roster.edit",
  rate: "write",
  params: idParams,
  input: ReplaceRosterSchema,
  handle: async ({ em, viewer, params, input }) => ({ roster: await replaceRoster(em, viewer, params.id, input) }),
});

export const DELETE = route({
  who: "member",
  action: "roster.edit",
  rate: "write",
  params: idParams,
  handle: ({ em, viewer, params }) => removeRoster(em, viewer, params.id),
});
