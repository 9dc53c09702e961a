import { fork } from "@/lib/server/database";
import { route } from "@/lib/server/http/route";

/** Answers 200 when settings are usable and the database answers; what a balancer and the start command ask. */
export const GET = route({
  who: "anyone",
  action: null,
  handle: async () => {
    await (await fork()).getConnection().execute("select 1");
    return { status: "ok" };
  },
});
