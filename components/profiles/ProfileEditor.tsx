"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { z } from "zod";
import { ApiProblem, ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { Cell, Table } from "@/components/ui/Table";
import { ProfileAnswerSchema, type ProfileView, ProfileViewSchema } from "@/lib/case/catalogue";
import { allLimits, builtIn, isHsName, isProfileName, type Limit } from "@/lib/limits/profile";
import { AS_BASE, type LimitDraft, type ProfileDraft, profileDraft, readDraft } from "./draft";
import { boundWords, unitWords } from "./LimitRows";

const columns = [
  { key: "symbol", head: "Parameter" },
  { key: "min", head: "Least", number: true },
  { key: "max", head: "Greatest", number: true },
  { key: "unit", head: "Unit" },
  { key: "base", head: "In the base" },
  { key: "source", head: "Where it comes from" },
];

/** A profile of the team: the base's limits with the values it changes. Every save is a new version. */
export function ProfileEditor({ initial, mayEdit }: { initial: ProfileView; mayEdit: boolean }) {
  const router = useRouter();
  const [kept, setKept] = useState(initial);
  const [name, setName] = useState(initial.name);
  const [draft, setDraft] = useState<ProfileDraft>(() => profileDraft(initial.changes));
  const [theirs, setTheirs] = useState<ProfileView | null>(null);
  const [said, setSaid] = useState<{ readonly kind: "note" | "broken"; readonly text: string } | null>(null);
  const [busy, setBusy] = useState(false);
  const from = builtIn(isProfileName(kept.base) ? kept.base : "Standard-mode");
  const base = allLimits(from);
  const { changes, errors } = readDraft(draft, base);
  const changed = name !== kept.name || JSON.stringify(changes) !== JSON.stringify(kept.changes) || errors.size > 0;

  function show(profile: ProfileView) {
    setKept(profile);
    setName(profile.name);
    setDraft(profileDraft(profile.changes));
    setTheirs(null);
  }

  async function save(version: number) {
    if (errors.size > 0) return setSaid({ kind: "broken", text: `Not usable yet: ${[...errors.keys()].join(", ")}.` });
    setBusy(true);
    setSaid(null);
    try {
      const body = { name, base: kept.base, changes, version };
      const answer = await ask({ method: "PUT", path: `/api/profiles/${kept.id}`, body, answer: ProfileAnswerSchema });
      show(answer.profile);
      setSaid({ kind: "note", text: `Saved as version ${answer.profile.version}. Cases keep the version they were judged by.` });
    } catch (error) {
      const other = error instanceof ApiProblem && error.code === "stale" ? theirsOf(error.theirs) : null;
      if (other) setTheirs(other);
      else setSaid({ kind: "broken", text: wordsOf(error) });
    } finally {
      setBusy(false);
    }
  }

  async function putAway() {
    setBusy(true);
    try {
      await ask({ method: "DELETE", path: `/api/profiles/${kept.id}` });
      router.push("/profiles");
    } catch (error) {
      setSaid({ kind: "broken", text: wordsOf(error) });
      setBusy(false);
    }
  }

  const edit = (symbol: string, by: Partial<LimitDraft>) =>
    setDraft({ ...draft, [symbol]: { ...(draft[symbol] ?? AS_BASE), ...by } });
  const lines = (caption: string, hs: boolean) => (
    <Table caption={caption} columns={columns}>
      {Object.entries(base)
        .filter(([symbol]) => isHsName(symbol) === hs)
        .map(([symbol, limit]) => (
          <LimitLine
            key={symbol}
            symbol={symbol}
            base={limit}
            draft={draft[symbol] ?? AS_BASE}
            error={errors.get(symbol)}
            differs={symbol in changes}
            onEdit={mayEdit ? (by) => edit(symbol, by) : null}
          />
        ))}
    </Table>
  );
  return (
    <>
      <h1 className="font-serif text-head">{kept.name}</h1>
      <p className="mt-1 font-serif text-body text-quiet">
        Version {kept.version}, derived from {kept.base}. {Object.keys(kept.changes).length} values differ.
      </p>
      {mayEdit && (
        <div className="screen-only mb-4 mt-4 max-w-md">
          <Field label="Name" value={name} maxLength={80} onChange={(event) => setName(event.target.value)} />
        </div>
      )}
      <p className="my-3 max-w-[68ch] font-sans text-small text-quiet">
        An empty field is as in the base; a dash takes the limit away. What differs is marked as the team's own wherever it is
        quoted.
      </p>
      {lines(`Limits of ${kept.name}`, false)}
      {from.spec === "I2C" && (
        <details className="mt-6" open={kept.base === "High-speed" || Object.keys(changes).some(isHsName)}>
          <summary className="cursor-pointer border-b border-ink font-serif text-lg italic">Inside a High-speed transfer</summary>
          <p className="my-3 max-w-[68ch] font-sans text-small text-quiet">
            From the controller code to STOP, whatever profile judges the rest of the bus. The base's values are those for 100 pF;
            where a case gives the bus capacitance they follow it, a value of your own does not.
          </p>
          {lines(`Limits of ${kept.name} inside a High-speed transfer`, true)}
        </details>
      )}
      {mayEdit && (
        <div className="screen-only sticky bottom-0 flex flex-wrap items-baseline gap-5 border-t border-ink bg-paper py-3">
          <Button look="solid" disabled={!changed} busy={busy} onClick={() => void save(kept.version)}>
            Save as version {kept.version + 1}
          </Button>
          {changed && (
            <Button look="word" onClick={() => show(kept)}>
              Leave it as it was
            </Button>
          )}
          <span className="ml-auto">
            <PutAway busy={busy} onPutAway={() => void putAway()} />
          </span>
        </div>
      )}
      {said && (
        <div className="mt-4">
          <Notice kind={said.kind}>{said.text}</Notice>
        </div>
      )}
      {theirs && (
        <ProfileConflict
          theirs={theirs}
          changes={changes}
          onMine={() => void save(theirs.version)}
          onTheirs={() => show(theirs)}
        />
      )}
    </>
  );
}

function theirsOf(value: unknown): ProfileView | null {
  const parsed = z.union([ProfileViewSchema, ProfileAnswerSchema]).safeParse(value);
  if (!parsed.success) return null;
  return "profile" in parsed.data ? parsed.data.profile : parsed.data;
}

function PutAway({ busy, onPutAway }: { busy: boolean; onPutAway: () => void }) {
  const [asking, setAsking] = useState(false);
  if (!asking) {
    return (
      <Button look="word" onClick={() => setAsking(true)}>
        Put this profile away
      </Button>
    );
  }
  return (
    <span className="flex flex-wrap items-baseline gap-4">
      <span className="font-sans text-label">No new case can take it; cases judged by it keep it.</span>
      <Button look="danger" busy={busy} onClick={onPutAway}>
        Put it away
      </Button>
      <Button look="word" onClick={() => setAsking(false)}>
        Keep it
      </Button>
    </span>
  );
}

interface ProfileConflictProps {
  theirs: ProfileView;
  changes: ProfileView["changes"];
  onMine: () => void;
  onTheirs: () => void;
}

function ProfileConflict({ theirs, changes, onMine, onTheirs }: ProfileConflictProps) {
  const symbols = [...new Set([...Object.keys(changes), ...Object.keys(theirs.changes)])].filter(
    (symbol) => JSON.stringify(changes[symbol]) !== JSON.stringify(theirs.changes[symbol]),
  );
  const words = (change: ProfileView["changes"][string] | undefined) =>
    change === undefined
      ? "as in the base"
      : [
          change.min !== undefined && `least ${boundWords(change.min)}`,
          change.max !== undefined && `greatest ${boundWords(change.max)}`,
        ]
          .filter(Boolean)
          .join(", ");
  return (
    <div className="mt-4">
      <Notice
        kind="broken"
        title="Somebody else changed this profile meanwhile"
        actions={
          <>
            <Button look="solid" onClick={onMine}>
              Save mine over it
            </Button>
            <Button onClick={onTheirs}>Take theirs, version {theirs.version}</Button>
          </>
        }
      >
        <p>Nothing was overwritten. {symbols.length === 0 ? "The limits are the same; the name differs." : "What differs:"}</p>
        <ul className="mt-1">
          {symbols.map((symbol) => (
            <li key={symbol}>
              <span className="tabular text-hex">{symbol}</span>: yours {words(changes[symbol])}; theirs{" "}
              {words(theirs.changes[symbol])}
            </li>
          ))}
        </ul>
      </Notice>
    </div>
  );
}

interface LimitLineProps {
  symbol: string;
  base: Limit;
  draft: LimitDraft;
  error?: string;
  differs: boolean;
  onEdit: ((by: Partial<LimitDraft>) => void) | null;
}

function LimitLine({ symbol, base, draft, error, differs, onEdit }: LimitLineProps) {
  const entry = (bound: "min" | "max", words: string) =>
    onEdit ? (
      <input
        aria-label={`${words} of ${symbol}`}
        aria-invalid={error ? true : undefined}
        value={draft[bound]}
        placeholder={boundWords(base[bound])}
        inputMode="decimal"
        autoComplete="off"
        onChange={(event) => onEdit({ [bound]: event.target.value })}
        className="tabular w-24 border-0 border-b border-hairline bg-transparent py-0.5 text-right text-hex placeholder:text-quiet hover:border-ink aria-[invalid=true]:border-broken"
      />
    ) : (
      draft[bound] || boundWords(base[bound])
    );
  return (
    <tr className="align-top">
      <Cell className="whitespace-nowrap">
        <span className="tabular text-hex">{symbol}</span>
        {differs && <span className="ml-2 font-serif text-small italic text-accent">changed</span>}
        {error && <span className="block text-small text-broken">× {error}</span>}
      </Cell>
      <Cell number>{entry("min", "Least")}</Cell>
      <Cell number>{entry("max", "Greatest")}</Cell>
      <Cell className="whitespace-nowrap text-quiet">{unitWords(base.unit)}</Cell>
      <Cell className="tabular whitespace-nowrap text-hex text-quiet">
        {boundWords(base.min)} to {boundWords(base.max)}
      </Cell>
      <Cell className="min-w-52">
        {onEdit && differs ? (
          <input
            aria-label={`Where the change of ${symbol} comes from`}
            value={draft.source}
            maxLength={300}
            placeholder="our test plan 12"
            onChange={(event) => onEdit({ source: event.target.value })}
            className="w-full border-0 border-b border-hairline bg-transparent py-0.5 text-label placeholder:text-quiet hover:border-ink"
          />
        ) : differs ? (
          draft.source
        ) : (
          <span className="text-quiet">{base.source}</span>
        )}
      </Cell>
    </tr>
  );
}
