"use client";

import Link from "next/link";
import { type FormEvent, useState } from "react";
import useSWR from "swr";
import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { Select } from "@/components/ui/Select";
import type { LimitsChoice } from "@/lib/case/case";
import { ProfileListSchema, type ProfileView, RosterListSchema } from "@/lib/case/catalogue";
import type { CaseView } from "@/lib/case/wire";
import { PROFILE_NAMES } from "@/lib/limits/profile";
import { ask, wordsOf } from "./api";
import type { CaseHandle } from "./useCase";

export interface SettingsDialogProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  handle: CaseHandle;
}

/** Range that the published High-speed tables span, picofarad (UM10204 Rev 7 Table 12). */
const CB = { least: 100, most: 400 } as const;

/** A choice of limits as the value of a list, and back. */
function writtenChoice(choice: LimitsChoice): string {
  if (choice.kind === "automatic") return "automatic";
  return choice.kind === "built-in" ? `built-in:${choice.name}` : `team:${choice.profile}:${choice.version}`;
}

function choiceOf(value: string): LimitsChoice {
  const [kind, name = "", version = ""] = value.split(":");
  if (kind === "built-in") return { kind, name };
  return kind === "team" ? { kind, profile: name, version: Number(version) } : { kind: "automatic" };
}

function limitOptions(view: CaseView, profiles: readonly ProfileView[]) {
  const chosen = view.settings.limits;
  const options = [
    { value: "automatic", text: "slowest mode that the measured SCL fits" },
    ...PROFILE_NAMES.map((name) => ({ value: `built-in:${name}`, text: name })),
    ...profiles.map((profile) => ({
      value: `team:${profile.id}:${profile.version}`,
      text: `${profile.name}, version ${profile.version} (team)`,
    })),
  ];
  // A case keeps the version it was judged by, also where there is a newer one or the profile was put away.
  if (chosen.kind === "team" && !options.some((option) => option.value === writtenChoice(chosen)))
    options.push({
      value: writtenChoice(chosen),
      text: `${view.profile?.name ?? "a team's profile"}, version ${chosen.version} (as chosen)`,
    });
  return options;
}

/** What the captures of this case are judged by: limits, bus capacitance, roster. */
export function SettingsDialog({ open, onOpenChange, handle }: SettingsDialogProps) {
  return (
    <Dialog
      open={open}
      onOpenChange={onOpenChange}
      title="What this case is judged by"
      description="For all captures of the case. A change judges them anew; the verdicts of other cases stay."
    >
      {open && <Form handle={handle} onDone={() => onOpenChange(false)} />}
    </Dialog>
  );
}

function Form({ handle, onDone }: { handle: CaseHandle; onDone: () => void }) {
  const { view } = handle;
  const profiles = useSWR("/api/profiles", (path) => ask({ path, answer: ProfileListSchema }));
  const rosters = useSWR("/api/rosters", (path) => ask({ path, answer: RosterListSchema }));
  const [limits, setLimits] = useState(writtenChoice(view.settings.limits));
  const [roster, setRoster] = useState(view.settings.roster ?? "");
  const [cb, setCb] = useState(view.settings.cb_pf === null ? "" : String(view.settings.cb_pf));
  const [failed, setFailed] = useState(false);
  const [busy, setBusy] = useState(false);
  const team = profiles.data?.profiles ?? [];
  const known = rosters.data?.rosters ?? [];
  const fetched = rosters.data !== undefined;
  const pf = cb.trim() === "" ? null : Number(cb.replace(",", "."));
  const wrong = pf !== null && !(pf >= CB.least && pf <= CB.most) ? `from ${CB.least} to ${CB.most} pF` : undefined;
  const fast = usesHighSpeed(limits, team, view);
  const trouble = profiles.error ?? rosters.error;

  async function submit(event: FormEvent) {
    event.preventDefault();
    if (wrong) return;
    setBusy(true);
    const settings = { ...view.settings, limits: choiceOf(limits), roster: roster === "" ? null : roster, cb_pf: pf };
    const saved = await handle.edit({ settings });
    setBusy(false);
    setFailed(!saved);
    if (saved) onDone();
  }

  return (
    <form onSubmit={(event) => void submit(event)} className="grid gap-5">
      {trouble && <Notice kind="broken">{wordsOf(trouble)}</Notice>}
      <Select
        label="Limits"
        value={limits}
        onChange={(event) => setLimits(event.target.value)}
        options={limitOptions(view, team)}
      />
      {fast && (
        <Field
          label="Bus capacitance for High-speed, pF"
          value={cb}
          inputMode="decimal"
          placeholder="100"
          onChange={(event) => setCb(event.target.value)}
          hint="The published tables are for 100 and 400 pF; between them the limits go in proportion. Empty takes 100 pF, the strictest."
          error={wrong}
        />
      )}
      <Select
        label="Roster"
        value={roster}
        onChange={(event) => setRoster(event.target.value)}
        options={[
          { value: "", text: "none" },
          ...known.map(({ id, name, entries }) => ({ value: id, text: `${name} (${entries.length})` })),
          ...(roster !== "" && !known.some(({ id }) => id === roster)
            ? [{ value: roster, text: fetched ? "a roster that was deleted" : "…" }]
            : []),
        ]}
      />
      <p className="font-sans text-label text-quiet">
        What is in them: <Link href="/profiles">limits profiles</Link>, <Link href="/rosters">rosters</Link>.
      </p>
      {failed && <Notice kind="broken">{handle.trouble ?? "It was not saved: somebody else changed the case meanwhile."}</Notice>}
      <div>
        <Button look="solid" type="submit" busy={busy}>
          Judge it so
        </Button>
      </div>
    </form>
  );
}

/** Automatic limits find a High-speed transfer by its controller code, so the capacitance can matter there too. */
function usesHighSpeed(value: string, team: readonly ProfileView[], view: CaseView): boolean {
  const choice = choiceOf(value);
  if (choice.kind === "automatic") return true;
  const name =
    choice.kind === "built-in" ? choice.name : (team.find(({ id }) => id === choice.profile)?.base ?? view.profile?.base ?? "");
  return name === "High-speed";
}
