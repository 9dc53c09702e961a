"use client";

import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";
import { statusWords } from "@/lib/case/case";
import type { CaseView } from "@/lib/case/wire";
import type { Conflict, EditFields } from "./useCase";

const names: Record<keyof EditFields, string> = {
  title: "Title",
  status: "Status",
  assignee: "With",
  finding: "Finding",
  settings: "Settings",
};

function shown(field: keyof EditFields, value: unknown, view: CaseView): string {
  if (field === "status") return statusWords[value as CaseView["status"]];
  if (field === "assignee") {
    if (value === null || view.assignee === null) return value === null ? "nobody" : "your choice";
    return value === view.assignee.id ? view.assignee.name : "your choice";
  }
  return typeof value === "string" ? value || "(empty)" : JSON.stringify(value, null, 1);
}

function theirValue(field: keyof EditFields, theirs: CaseView): unknown {
  return field === "assignee" ? (theirs.assignee?.id ?? null) : theirs[field];
}

function pairs(conflict: Conflict): { name: string; mine: string; theirs: string }[] {
  if (conflict.of === "note")
    return [{ name: `Note ${conflict.theirs.number}`, mine: conflict.mine, theirs: conflict.theirs.text }];
  const fields = Object.keys(conflict.mine) as (keyof EditFields)[];
  return fields.map((field) => ({
    name: names[field],
    mine: shown(field, conflict.mine[field], conflict.theirs),
    theirs: shown(field, theirValue(field, conflict.theirs), conflict.theirs),
  }));
}

/** Two people changed the same thing: both versions stand side by side until this one has chosen. */
export function ConflictDialog({
  conflict,
  settle,
}: {
  conflict: Conflict | null;
  settle: (choice: "mine" | "theirs") => Promise<boolean>;
}) {
  return (
    <Dialog
      open={conflict !== null}
      onOpenChange={(open) => {
        if (!open) void settle("theirs");
      }}
      title="Somebody else changed this meanwhile"
      description="Nothing was overwritten. Choose what stands; the other text can be copied from here."
    >
      {conflict !== null &&
        pairs(conflict).map(({ name, mine, theirs }) => (
          <section key={name} className="mt-3 grid gap-5 sm:grid-cols-2">
            <Version label={`${name}, yours`} text={mine} />
            <Version label={`${name}, theirs`} text={theirs} />
          </section>
        ))}
      <div className="mt-6 flex flex-wrap gap-4">
        <Button look="solid" onClick={() => void settle("mine")}>
          Save mine over it
        </Button>
        <Button onClick={() => void settle("theirs")}>Keep theirs</Button>
      </div>
    </Dialog>
  );
}

function Version({ label, text }: { label: string; text: string }) {
  return (
    <div>
      <p className="font-sans text-label text-quiet">{label}</p>
      <p className="mt-1 max-h-64 select-text overflow-y-auto whitespace-pre-wrap border-t border-hairline pt-1 font-serif text-body">
        {text}
      </p>
    </div>
  );
}
