import { SaveRosterSchema } from "@/lib/case/catalogue";
import { route } from "@/lib/server/http/route";
import { listRosters } from "@/lib/server/rosters/read";
import { addRoster } from "@/lib/server/rosters/write";

export const GET = route({
  who: "member",
  action: "case.read",
  handle: async ({ em, viewer }) => ({ rosters: await listRosters(em, viewer) }),
});

export const POST = route({
  who: "member",
  action: "roster.edit",
  rate: "write",
  input: SaveRosterSchema,
  handle: async ({ em, viewer, input }) => Response.json({ roster: await addRoster(em, viewer, input) }, { status: 201 }),
});
