"use client";

import { type FormEvent, useState } from "react";
import useSWR from "swr";
import { When } from "@/components/cases/When";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { type CreatedShare, CreatedShareSchema, PASSPHRASE, SHARE_DAYS, type Share, ShareListSchema } from "@/lib/case/wire";

export interface ShareDialogProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  caseNumber: number;
  /** The query of the view that is to open, taken when the link is made. */
  view: () => string;
}

/** Makes, lists and revokes the links of a case. The secret of a new one is shown once and never again. */
export function ShareDialog({ open, onOpenChange, caseNumber, view }: ShareDialogProps) {
  const path = `/api/cases/${caseNumber}/shares`;
  const { data, error, mutate } = useSWR(open ? path : null, () => ask({ path, answer: ShareListSchema }));
  const [created, setCreated] = useState<CreatedShare | null>(null);
  const close = (next: boolean) => {
    if (!next) setCreated(null);
    onOpenChange(next);
  };
  return (
    <Dialog
      open={open}
      onOpenChange={close}
      title="Share this case"
      description="Whoever has the link reads the case without an account, at exactly the view that is open now, and can change nothing."
    >
      {created === null ? (
        <NewShare
          path={path}
          view={view}
          onCreated={(answer) => {
            setCreated(answer);
            void mutate();
          }}
        />
      ) : (
        <Ready created={created} onAnother={() => setCreated(null)} />
      )}
      <section aria-label="Links of this case" className="mt-8">
        <h3 className="border-b border-ink pb-1 font-serif text-lg italic">Links</h3>
        {error && <Notice kind="broken">{wordsOf(error)}</Notice>}
        {data?.shares.length === 0 && <p className="mt-2 font-serif text-body text-quiet">This case has not been shared.</p>}
        <ul>
          {data?.shares.map((share) => (
            <ShareLine key={share.id} share={share} path={path} onChange={() => void mutate()} />
          ))}
        </ul>
      </section>
    </Dialog>
  );
}

function NewShare({ path, view, onCreated }: { path: string; view: () => string; onCreated: (answer: CreatedShare) => void }) {
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const submit = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const form = new FormData(event.currentTarget);
    const passphrase = String(form.get("passphrase") ?? "");
    setBusy(true);
    try {
      const body = {
        label: String(form.get("label") ?? ""),
        expires_in_days: Number(form.get("days")),
        passphrase: passphrase === "" ? null : passphrase,
        raw_allowed: form.get("raw") !== null,
        view: view(),
      };
      onCreated(await ask({ method: "POST", path, body, answer: CreatedShareSchema }));
    } catch (error) {
      setTrouble(wordsOf(error));
    } finally {
      setBusy(false);
    }
  };
  return (
    <form onSubmit={(event) => void submit(event)} className="grid gap-4">
      <div className="grid gap-4 sm:grid-cols-2">
        <Field label="For whom (only your team sees this)" name="label" maxLength={120} autoComplete="off" />
        <Field
          label="Days until it ends"
          name="days"
          type="number"
          min={1}
          max={SHARE_DAYS.most}
          defaultValue={SHARE_DAYS.default}
          required
        />
      </div>
      <Field
        label="Passphrase, if one is wanted"
        name="passphrase"
        type="password"
        minLength={PASSPHRASE.least}
        maxLength={PASSPHRASE.most}
        autoComplete="new-password"
        hint={`At least ${PASSPHRASE.least} characters; send it by another way than the link.`}
      />
      <label className="flex items-baseline gap-2 font-sans text-label">
        <input type="checkbox" name="raw" className="accent-accent" />
        the original file may be downloaded
      </label>
      <p className="font-serif text-body text-quiet">
        A capture can hold secrets: contents of memories, keys, serial numbers. Look before you send it.
      </p>
      {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
      <div>
        <Button look="solid" type="submit" busy={busy}>
          Make a link
        </Button>
      </div>
    </form>
  );
}

function Ready({ created, onAnother }: { created: CreatedShare; onAnother: () => void }) {
  const [copied, setCopied] = useState(false);
  return (
    <div className="grid gap-3">
      <Field
        label="The link, shown only now"
        readOnly
        value={created.url}
        onFocus={(event) => event.currentTarget.select()}
        className="tabular text-hex"
      />
      <div className="flex flex-wrap gap-4">
        <Button
          look="solid"
          onClick={() => {
            void navigator.clipboard.writeText(created.url).then(() => setCopied(true));
          }}
        >
          {copied ? "Copied" : "Copy the link"}
        </Button>
        <Button onClick={onAnother}>Make another</Button>
      </div>
      {created.removed.length > 0 && (
        <p className="font-serif text-body text-quiet">Left out of what the link shows: {created.removed.join(", ")}.</p>
      )}
    </div>
  );
}

function ShareLine({ share, path, onChange }: { share: Share; path: string; onChange: () => void }) {
  const [trouble, setTrouble] = useState<string | null>(null);
  const revoke = async () => {
    try {
      await ask({ method: "DELETE", path: `${path}/${share.id}` });
      onChange();
    } catch (error) {
      setTrouble(wordsOf(error));
    }
  };
  return (
    <li className="flex flex-wrap items-baseline gap-x-5 gap-y-1 border-b border-hairline py-2 font-sans text-label">
      <span className="min-w-32 flex-1">{share.label || "no name"}</span>
      <span className="text-quiet">
        {share.state === "open" ? "ends " : `${share.state}, ended `}
        <When at={share.revoked_at ?? share.expires_at} />
      </span>
      <span className="text-quiet">
        opened {share.opened} {share.opened === 1 ? "time" : "times"}
        {share.has_passphrase && ", passphrase"}
        {share.raw_allowed && ", original file"}
      </span>
      {share.state === "open" && (
        <Button look="word" onClick={() => void revoke()}>
          Revoke
        </Button>
      )}
      {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
    </li>
  );
}
