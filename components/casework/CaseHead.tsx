"use client";

import { useState } from "react";
import useSWR from "swr";
import { Select } from "@/components/ui/Select";
import { statuses, statusWords, TEXT_LIMIT } from "@/lib/case/case";
import { PeopleSchema } from "@/lib/case/catalogue";
import type { Action } from "@/lib/case/roles";
import type { CaseView } from "@/lib/case/wire";
import { ask } from "./api";
import type { EditFields } from "./useCase";

export interface CaseHeadProps {
  view: CaseView;
  edit: (fields: EditFields) => Promise<boolean>;
}

const statusOptions = statuses.map((value) => ({ value, text: statusWords[value] }));

/** Title, status and assignee, each edited where it stands and saved on leaving it. */
export function CaseHead({ view, edit }: CaseHeadProps) {
  const may = (action: Action) => view.may.includes(action);
  const people = useSWR(may("case.assign") ? "/api/people" : null, (path) => ask({ path, answer: PeopleSchema }));
  const options = (people.data?.people ?? (view.assignee ? [view.assignee] : [])).map(({ id, name }) => ({
    value: id,
    text: name,
  }));
  return (
    <div>
      {may("case.edit") ? (
        <Title key={view.title} title={view.title} save={(title) => edit({ title })} />
      ) : (
        <h1 className="font-serif text-head">{view.title}</h1>
      )}
      <div className="screen-only mt-1 flex flex-wrap items-baseline gap-x-6 gap-y-1">
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
      </div>
    </div>
  );
}

function Title({ title, save }: { title: string; save: (title: string) => Promise<boolean> }) {
  const [text, setText] = useState(title);
  const leave = async () => {
    const next = text.trim();
    if (next === title || next === "") setText(title);
    else if (!(await save(next))) setText(next);
  };
  return (
    <h1 className="font-serif text-head">
      <input
        aria-label="Title"
        value={text}
        maxLength={TEXT_LIMIT.title}
        onChange={(event) => setText(event.target.value)}
        onBlur={() => void leave()}
        onKeyDown={(event) => {
          if (event.key === "Enter") event.currentTarget.blur();
          if (event.key === "Escape") setText(title);
        }}
        className="w-full border-b border-transparent bg-transparent font-serif text-head hover:border-field focus-visible:border-accent"
      />
    </h1>
  );
}
