import { CreateFaultTagSchema } from "@/lib/case/catalogue";
import { route } from "@/lib/server/http/route";
import { addFaultTag, readCatalogue } from "@/lib/server/tags/catalogue";

export const GET = route({
  who: "member",
  action: "case.read",
  handle: async ({ em, viewer }) => ({ fault_tags: await readCatalogue(em, viewer) }),
});

export const POST = route({
  who: "member",
  action: "catalogue.edit",
  rate: "write",
  input: CreateFaultTagSchema,
  handle: async ({ em, viewer, input }) => Response.json({ fault_tag: await addFaultTag(em, viewer, input) }, { status: 201 }),
});
