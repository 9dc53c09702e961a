"use client";

import { useEffect, useRef, useState } from "react";
import type { BenchCase } from "@/components/bench/annotations";
import { Button } from "@/components/ui/Button";
import { count } from "@/lib/view/format";
import { MarginHead } from "./MarginHead";

/** Numbers that name transactions in a finding, written #213, become links. */
function Cited({ text, onGo }: { text: string; onGo: (transaction: number) => void }) {
  return text.split(/(#\d{1,9})/).map((part, place) => {
    const key = `${place}${part}`;
    if (!/^#\d+$/.test(part)) return <span key={key}>{part}</span>;
    const transaction = Number(part.slice(1));
    return (
      <button key={key} type="button" onClick={() => onGo(transaction)} className="border-b border-field hover:border-ink">
        {count(transaction)}
      </button>
    );
  });
}

/** The written conclusion of the case. */
export function FindingPart({ of, onGo }: { of: BenchCase; onGo: (transaction: number) => void }) {
  const [draft, setDraft] = useState<string | null>(null);
  const [error, setError] = useState("");
  const [busy, setBusy] = useState(false);
  // A conflict settled in favour of this draft saves it from elsewhere: then the finding becomes what the draft says.
  const stood = useRef(of.finding);
  useEffect(() => {
    if (stood.current === of.finding) return;
    stood.current = of.finding;
    if (draft === of.finding) setDraft(null);
  }, [draft, of.finding]);
  if (of.finding === "" && !of.saveFinding) return null;

  async function save() {
    if (draft === null || !of.saveFinding) return;
    setBusy(true);
    const refused = await of.saveFinding(draft);
    setBusy(false);
    setError(refused ?? "");
    if (!refused) setDraft(null);
  }

  return (
    <section>
      <MarginHead>Finding</MarginHead>
      {draft === null ? (
        <div className="mt-2 font-serif text-body">
          <p className="whitespace-pre-wrap">
            {of.finding ? <Cited text={of.finding} onGo={onGo} /> : <span className="text-quiet">Not written yet.</span>}
          </p>
          {of.saveFinding && (
            <Button look="word" className="screen-only mt-2" onClick={() => setDraft(of.finding)}>
              {of.finding === "" ? "write it" : "change"}
            </Button>
          )}
        </div>
      ) : (
        <div className="screen-only mt-2">
          <label className="block font-sans text-small text-quiet">
            #213 cites a transaction
            <textarea
              rows={7}
              value={draft}
              onChange={(event) => setDraft(event.target.value)}
              className="mt-1 w-full resize-y border border-field bg-transparent p-2 font-serif text-body text-ink hover:border-ink"
            />
          </label>
          <p aria-live="polite" className="font-sans text-small text-broken">
            {error}
          </p>
          <div className="mt-1 flex gap-4">
            <Button look="word" busy={busy} onClick={save}>
              save
            </Button>
            <Button look="word" onClick={() => setDraft(null)}>
              leave as it was
            </Button>
          </div>
        </div>
      )}
    </section>
  );
}
