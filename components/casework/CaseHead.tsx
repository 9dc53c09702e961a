"use client";

import { type FormEvent, useState } from "react";
import useSWR from "swr";
import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";
import { Field } from "@/components/ui/Field";
import { Select } from "@/components/ui/Select";
import { statuses, statusWords, TEXT_LIMIT } from "@/lib/case/case";
import { PeopleSchema } from "@/lib/case/catalogue";
import type { Action } from "@/lib/case/roles";
import type { CaseView } from "@/lib/case/wire";
import { AddCaptures } from "./AddCaptures";
import { ask } from "./api";
import type { EditFields } from "./useCase";

export interface CaseHeadProps {
  view: CaseView;
  edit: (fields: EditFields) => Promise<boolean>;
}

const statusOptions = statuses.map((value) => ({ value, text: statusWords[value] }));

/** Status and assignee, changed where they stand, and the way to another title. */
export function CaseHead({ view, edit }: CaseHeadProps) {
  const may = (action: Action) => view.may.includes(action);
  const people = useSWR(may("case.assign") ? "/api/people" : null, (path) => ask({ path, answer: PeopleSchema }));
  const options = (people.data?.people ?? (view.assignee ? [view.assignee] : [])).map(({ id, name }) => ({
    value: id,
    text: name,
  }));
  return (
    <div className="flex flex-wrap items-baseline gap-x-6 gap-y-1">
      {may("case.status") ? (
        <Select
          inline
          label="Status"
          options={statusOptions}
          value={view.status}
          onChange={(event) => void edit({ status: statuses.find((status) => status === event.target.value) })}
        />
      ) : (
        <p className="font-sans text-label text-quiet">{statusWords[view.status]}</p>
      )}
      {may("case.assign") ? (
        <Select
          inline
          label="With"
          options={[{ value: "", text: "nobody" }, ...options]}
          value={view.assignee?.id ?? ""}
          onChange={(event) => void edit({ assignee: event.target.value === "" ? null : event.target.value })}
        />
      ) : (
        <p className="font-sans text-label text-quiet">with {view.assignee?.name ?? "nobody"}</p>
      )}
      {may("case.edit") && <Rename key={view.title} title={view.title} save={(title) => edit({ title })} />}
      {may("capture.upload") && <AddCaptures caseNumber={view.number} />}
    </div>
  );
}

function Rename({ title, save }: { title: string; save: (title: string) => Promise<boolean> }) {
  const [open, setOpen] = useState(false);
  const [text, setText] = useState(title);
  const submit = async (event: FormEvent) => {
    event.preventDefault();
    if (text.trim() === title || (await save(text.trim()))) setOpen(false);
  };
  return (
    <>
      <Button look="word" onClick={() => setOpen(true)}>
        Rename
      </Button>
      <Dialog open={open} onOpenChange={setOpen} title="Rename this case">
        <form onSubmit={(event) => void submit(event)} className="grid gap-5">
          <Field
            label="Title"
            value={text}
            maxLength={TEXT_LIMIT.title}
            required
            onChange={(event) => setText(event.target.value)}
          />
          <div>
            <Button look="solid" type="submit" disabled={text.trim() === ""}>
              Save
            </Button>
          </div>
        </form>
      </Dialog>
    </>
  );
}
