"use client";

import { useEffect, useState } from "react";
import { Button } from "@/components/ui/Button";
import { TextField } from "@/components/ui/Field";
import { TEXT_LIMIT } from "@/lib/case/case";

export interface FindingProps {
  caseNumber: number;
  text: string;
  mayWrite: boolean;
  save: (text: string) => Promise<boolean>;
}

const draftKey = (caseNumber: number) => `firstlow-finding-${caseNumber}`;

/** The written conclusion. A draft outlives a reload in this browser until it is saved or dropped. */
export function Finding({ caseNumber, text, mayWrite, save }: FindingProps) {
  const [draft, setDraft] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  useEffect(() => {
    if (mayWrite) setDraft(localStorage.getItem(draftKey(caseNumber)));
  }, [caseNumber, mayWrite]);

  const write = (value: string) => {
    setDraft(value);
    localStorage.setItem(draftKey(caseNumber), value);
  };
  const drop = () => {
    setDraft(null);
    localStorage.removeItem(draftKey(caseNumber));
  };
  const submit = async () => {
    if (draft === null) return;
    setBusy(true);
    if (await save(draft)) drop();
    setBusy(false);
  };

  return (
    <section aria-labelledby="finding">
      <h2 id="finding" className="border-b border-ink pb-1 font-serif text-lg italic">
        Finding
      </h2>
      {draft === null ? (
        <div className="mt-2">
          {text === "" ? (
            <p className="font-serif text-body text-quiet">Nothing concluded yet.</p>
          ) : (
            <p className="whitespace-pre-wrap font-serif text-body">{text}</p>
          )}
          {mayWrite && (
            <Button look="word" className="screen-only mt-2" onClick={() => write(text)}>
              {text === "" ? "Write the finding" : "Edit"}
            </Button>
          )}
        </div>
      ) : (
        <div className="screen-only mt-2 grid gap-3">
          <TextField
            label="What happened, how you know, what to change"
            rows={7}
            maxLength={TEXT_LIMIT.finding}
            value={draft}
            onChange={(event) => write(event.target.value)}
          />
          <div className="flex gap-4">
            <Button look="solid" busy={busy} onClick={() => void submit()}>
              Save
            </Button>
            <Button onClick={drop}>Drop the draft</Button>
          </div>
        </div>
      )}
    </section>
  );
}
