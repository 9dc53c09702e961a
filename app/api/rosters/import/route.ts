import { ImportRosterSchema } from "@/lib/case/catalogue";
import { route } from "@/lib/server/http/route";
import { importRoster } from "@/lib/server/rosters/csv";

export const POST = route({
  who: "member",
  action: "roster.edit",
  rate: "write",
  input: ImportRosterSchema,
  handle: async ({ em, viewer, input }) =>
    Response.json({ roster: await importRoster(em, viewer, input.name, input.csv) }, { status: 201 }),
});
