"use client";

import { useActionState } from "react";
import { Button } from "@/components/ui/Button";
import { idle } from "@/lib/case/form";
import { signOut } from "@/lib/server/auth/actions";

/** `next` is where to go afterwards; the front door when left out. */
export function SignOut({ next }: { next?: string }) {
  const [, run, busy] = useActionState(signOut, idle);
  return (
    <form action={run}>
      {next && <input type="hidden" name="next" value={next} />}
      <Button type="submit" look="word" busy={busy}>
        Sign out
      </Button>
    </form>
  );
}
