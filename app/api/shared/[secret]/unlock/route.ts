import { UnlockSchema } from "@/lib/case/wire";
import { secretParams } from "@/lib/server/http/params";
import { route } from "@/lib/server/http/route";
import { unlockShare } from "@/lib/server/shares/write";

export const POST = route({
  who: "anyone",
  action: null,
  params: secretParams,
  input: UnlockSchema,
  handle: async ({ em, params, input }) => {
    const cookie = await unlockShare(em, params.secret, input.passphrase);
    return Response.json({ unlocked: true }, { headers: cookie === null ? {} : { "set-cookie": cookie } });
  },
});
