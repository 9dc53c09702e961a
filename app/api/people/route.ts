import { readPeople } from "@/lib/server/cases/read";
import { route } from "@/lib/server/http/route";

export const GET = route({
  who: "member",
  action: "case.read",
  handle: async ({ em, viewer }) => ({ people: await readPeople(em, viewer) }),
});
