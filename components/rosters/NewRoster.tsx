"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { RosterAnswerSchema } from "@/lib/case/catalogue";
import { readRoster } from "@/lib/diagnosis/roster";

/** Largest CSV that is taken, bytes. */
const LARGEST = 1_000_000;

/** A new roster: empty, or out of a CSV that is checked before it is sent. */
export function NewRoster({ onMade }: { onMade: () => void }) {
  const router = useRouter();
  const [name, setName] = useState("");
  const [csv, setCsv] = useState<{ readonly name: string; readonly text: string; readonly devices: number } | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);

  async function take(file: File | undefined) {
    setCsv(null);
    setTrouble(null);
    if (!file) return;
    if (file.size > LARGEST) return setTrouble(`${file.name} is larger than 1 MB; that is no roster.`);
    const text = await file.text();
    const read = readRoster(text);
    if (!read.ok) return setTrouble(`${read.problem.message} ${read.problem.advice}`);
    setCsv({ name: file.name, text, devices: read.value.length });
    if (name.trim() === "") setName(file.name.replace(/\.\w+$/, ""));
  }

  async function submit(event: FormEvent) {
    event.preventDefault();
    setBusy(true);
    try {
      const made = await (csv
        ? ask({ method: "POST", path: "/api/rosters/import", body: { name, csv: csv.text }, answer: RosterAnswerSchema })
        : ask({ method: "POST", path: "/api/rosters", body: { name, entries: [] }, answer: RosterAnswerSchema }));
      onMade();
      router.push(`/rosters/${made.roster.id}`);
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  }

  return (
    <form onSubmit={(event) => void submit(event)} className="mt-10 grid max-w-2xl gap-5">
      <h2 className="border-b border-ink font-serif text-lg italic">A new roster</h2>
      <div className="grid gap-5 sm:grid-cols-2">
        <Field
          label="Name"
          required
          maxLength={120}
          value={name}
          onChange={(event) => setName(event.target.value)}
          autoComplete="off"
        />
        <Field
          label="From a CSV, if there is one"
          type="file"
          accept=".csv,.txt,text/csv,text/plain"
          onChange={(event) => void take(event.target.files?.[0])}
          hint={
            csv
              ? `${csv.name}: ${csv.devices} ${csv.devices === 1 ? "device" : "devices"}`
              : "Columns role, name, address_7bit or address_8bit, tlow_s, thigh_s, vol_v, stretch_allow_s, registers."
          }
        />
      </div>
      {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
      <div>
        <Button look="solid" type="submit" busy={busy} disabled={name.trim() === ""}>
          {csv ? "Import it" : "Begin it"}
        </Button>
      </div>
    </form>
  );
}
