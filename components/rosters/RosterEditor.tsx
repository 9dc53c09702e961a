"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { z } from "zod";
import { ApiProblem, ask, wordsOf } from "@/components/casework/api";
import { Versus } from "@/components/race/Versus";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { RosterAnswerSchema, type RosterView, RosterViewSchema } from "@/lib/case/catalogue";
import { readRoster } from "@/lib/diagnosis/roster";
import { emptyDraft, type RosterDraft, type RosterErrors, rosterDraft, rosterEntry } from "@/lib/view/roster-row";
import { RosterConflict } from "./RosterConflict";
import { RosterTable } from "./RosterTable";

let made = 0;

/** A key that no row of this page has. */
function freshKey(): string {
  made += 1;
  return `row${made}`;
}

function draftsOf(roster: Pick<RosterView, "entries">): RosterDraft[] {
  return roster.entries.map((entry) => rosterDraft(entry, freshKey()));
}

const NO_ERRORS: ReadonlyMap<string, RosterErrors> = new Map();

/** One roster: read by everybody, edited by those who may; saved as a whole on the version that was read. */
export function RosterEditor({ initial, mayEdit }: { initial: RosterView; mayEdit: boolean }) {
  const router = useRouter();
  const [kept, setKept] = useState(initial);
  const [name, setName] = useState(initial.name);
  const [rows, setRows] = useState(() => draftsOf(initial));
  const [errors, setErrors] = useState(NO_ERRORS);
  const [theirs, setTheirs] = useState<RosterView | null>(null);
  const [said, setSaid] = useState<{ readonly kind: "note" | "broken"; readonly text: string } | null>(null);
  const [busy, setBusy] = useState(false);
  const read = rows.map((row) => ({ key: row.key, ...rosterEntry(row) }));
  const entries = read.flatMap(({ entry }) => (entry ? [entry] : []));
  const changed = name !== kept.name || JSON.stringify(entries) !== JSON.stringify(kept.entries) || entries.length < rows.length;

  function show(roster: RosterView) {
    setKept(roster);
    setName(roster.name);
    setRows(draftsOf(roster));
    setErrors(NO_ERRORS);
    setTheirs(null);
  }

  async function save(version: number) {
    setErrors(new Map(read.map((row) => [row.key, row.errors])));
    const wrong = read.length - entries.length;
    if (wrong > 0)
      return setSaid({ kind: "broken", text: `${wrong} ${wrong === 1 ? "row" : "rows"} cannot be used yet; see there.` });
    setBusy(true);
    setSaid(null);
    try {
      const body = { name, entries, version };
      const answer = await ask({ method: "PUT", path: `/api/rosters/${kept.id}`, body, answer: RosterAnswerSchema });
      show(answer.roster);
      setSaid({ kind: "note", text: `Saved as version ${answer.roster.version}.` });
    } catch (error) {
      const other = error instanceof ApiProblem && error.code === "stale" ? theirsOf(error.theirs) : null;
      if (other) setTheirs(other);
      else setSaid({ kind: "broken", text: wordsOf(error) });
    } finally {
      setBusy(false);
    }
  }

  async function remove() {
    setBusy(true);
    try {
      await ask({ method: "DELETE", path: `/api/rosters/${kept.id}` });
      router.push("/rosters");
    } catch (error) {
      setSaid({ kind: "broken", text: wordsOf(error) });
      setBusy(false);
    }
  }

  async function take(file: File | undefined) {
    if (!file) return;
    const roster = readRoster(await file.text());
    if (!roster.ok) return setSaid({ kind: "broken", text: `${roster.problem.message} ${roster.problem.advice}` });
    setRows(draftsOf({ entries: roster.value }));
    setErrors(NO_ERRORS);
    setSaid({
      kind: "note",
      text: `${roster.value.length} devices were read from ${file.name}. They stand here, not saved yet.`,
    });
  }

  return (
    <>
      <h1 className="mb-4 font-serif text-head">{kept.name}</h1>
      {mayEdit && (
        <div className="screen-only mb-5 max-w-md">
          <Field label="Name" value={name} maxLength={120} onChange={(event) => setName(event.target.value)} />
        </div>
      )}
      {rows.length === 0 ? (
        <p className="font-serif text-body text-quiet">No devices stand here yet.</p>
      ) : (
        <RosterTable
          rows={rows}
          errors={errors}
          {...(mayEdit && {
            onRow: (row: RosterDraft) => setRows(rows.map((one) => (one.key === row.key ? row : one))),
            onRemove: (key: string) => setRows(rows.filter((one) => one.key !== key)),
          })}
        />
      )}
      <p className="mt-2 max-w-[68ch] font-sans text-small text-quiet">
        An address can be typed in either notation. A time without a unit is in µs. A controller's own timing is used instead of
        what would be learned from the capture.
      </p>
      {mayEdit && (
        <Actions
          changed={changed}
          busy={busy}
          onAdd={() => setRows([...rows, emptyDraft(freshKey())])}
          onSave={() => void save(kept.version)}
          onLeave={() => show(kept)}
          onFile={(file) => void take(file)}
          onRemove={() => void remove()}
        />
      )}
      <p className="mt-3 font-sans text-label">
        <a href={`/api/rosters/${kept.id}/csv`}>Save version {kept.version} as CSV</a>
      </p>
      {said && (
        <div className="mt-5">
          <Notice kind={said.kind}>{said.text}</Notice>
        </div>
      )}
      {theirs && (
        <RosterConflict
          mine={{ name, entries }}
          theirs={theirs}
          onMine={() => void save(theirs.version)}
          onTheirs={() => show(theirs)}
        />
      )}
      <Versus entries={entries} />
    </>
  );
}

function theirsOf(value: unknown): RosterView | null {
  const parsed = z.union([RosterViewSchema, RosterAnswerSchema]).safeParse(value);
  if (!parsed.success) return null;
  return "roster" in parsed.data ? parsed.data.roster : parsed.data;
}

interface ActionsProps {
  changed: boolean;
  busy: boolean;
  onAdd: () => void;
  onSave: () => void;
  onLeave: () => void;
  onFile: (file: File | undefined) => void;
  onRemove: () => void;
}

function Actions({ changed, busy, onAdd, onSave, onLeave, onFile, onRemove }: ActionsProps) {
  const [asking, setAsking] = useState(false);
  return (
    <div className="screen-only mt-4 flex flex-wrap items-baseline gap-x-6 gap-y-3">
      <Button onClick={onAdd}>Add a device</Button>
      <Button look="solid" disabled={!changed} busy={busy} onClick={onSave}>
        Save
      </Button>
      {changed && (
        <Button look="word" onClick={onLeave}>
          Leave it as it was
        </Button>
      )}
      <label className="font-sans text-label text-quiet">
        Read devices from a CSV{" "}
        <input
          type="file"
          accept=".csv,.txt,text/csv,text/plain"
          className="max-w-56 text-small"
          onChange={(event) => {
            onFile(event.target.files?.[0]);
            event.target.value = "";
          }}
        />
      </label>
      <span className="ml-auto flex flex-wrap items-baseline gap-4">
        {asking ? (
          <>
            <span className="font-sans text-label">Cases that use it go on without a roster.</span>
            <Button look="danger" busy={busy} onClick={onRemove}>
              Delete it
            </Button>
            <Button look="word" onClick={() => setAsking(false)}>
              Keep it
            </Button>
          </>
        ) : (
          <Button look="word" onClick={() => setAsking(true)}>
            Delete this roster
          </Button>
        )}
      </span>
    </div>
  );
}
