"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { Select } from "@/components/ui/Select";
import { ProfileAnswerSchema } from "@/lib/case/catalogue";
import { PROFILE_NAMES } from "@/lib/limits/profile";

/** A profile of the team begins as a copy of a built-in one. */
export function Derive({ base }: { base: string }) {
  const router = useRouter();
  const [name, setName] = useState("");
  const [from, setFrom] = useState(base);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);

  async function submit(event: FormEvent) {
    event.preventDefault();
    setBusy(true);
    try {
      const body = { name, base: from, changes: {} };
      const made = await ask({ method: "POST", path: "/api/profiles", body, answer: ProfileAnswerSchema });
      router.push(`/profiles/${made.profile.id}`);
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  }

  return (
    <form onSubmit={(event) => void submit(event)} className="mt-8 grid max-w-2xl gap-5">
      <h2 className="border-b border-ink font-serif text-lg italic">A profile of your own</h2>
      <div className="grid gap-5 sm:grid-cols-2">
        <Field
          label="Name"
          required
          maxLength={80}
          value={name}
          onChange={(event) => setName(event.target.value)}
          autoComplete="off"
        />
        <Select
          label="Begins as a copy of"
          value={from}
          onChange={(event) => setFrom(event.target.value)}
          options={PROFILE_NAMES.map((value) => ({ value, text: value }))}
        />
      </div>
      {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
      <div>
        <Button look="solid" type="submit" busy={busy} disabled={name.trim() === ""}>
          Derive it
        </Button>
      </div>
    </form>
  );
}
