"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import { Sheet } from "@/components/account/Sheet";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { PASSPHRASE, UnlockedSchema } from "@/lib/case/wire";

/** Asks for the passphrase of a link. */
export function Unlock({ path }: { path: string }) {
  const router = useRouter();
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string>();
  const submit = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const passphrase = String(new FormData(event.currentTarget).get("passphrase") ?? "");
    setBusy(true);
    try {
      await ask({ method: "POST", path: `/api${path}/unlock`, body: { passphrase }, answer: UnlockedSchema });
      router.refresh();
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  };
  return (
    <Sheet title="A shared case" lede="Whoever shared this case set a passphrase. It came to you by another way than the link.">
      <form onSubmit={(event) => void submit(event)} className="grid gap-5">
        <Field
          label="Passphrase"
          name="passphrase"
          type="password"
          autoComplete="off"
          required
          maxLength={PASSPHRASE.most}
          error={trouble}
        />
        <div>
          <Button look="solid" type="submit" busy={busy}>
            Open the case
          </Button>
        </div>
      </form>
    </Sheet>
  );
}
