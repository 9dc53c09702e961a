"use client";

import { useMemo, useState } from "react";
import { Bench } from "@/components/bench/Bench";
import { readOnly } from "@/components/casework/annotations";
import { CaptureNav } from "@/components/casework/CaptureNav";
import { useArchive } from "@/components/casework/useArchive";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import { analysisSettings } from "@/lib/case/analysis";
import { statusWords } from "@/lib/case/case";
import type { SharedView } from "@/lib/case/wire";

export interface SharedCaseProps {
  shared: SharedView;
  /** Address of the link, below which its bytes are fetched. */
  path: string;
}

function ordinalOf(view: string): number {
  const asked = Number(new URLSearchParams(view).get("capture"));
  return Number.isInteger(asked) && asked > 0 ? asked : 1;
}

/** A case as a link shows it: at exactly the view that was shared, and nothing on it can be changed. */
export function SharedCase({ shared, path }: SharedCaseProps) {
  const { file } = shared;
  const [chosen, setChosen] = useState(() => ordinalOf(shared.view));
  const capture = file.captures[chosen - 1] ?? file.captures[0] ?? null;
  const below = `/api${path}/captures/${capture?.id}`;
  const { source, trouble, again } = useArchive(capture, `${below}/archive`);
  const settings = useMemo(() => (capture ? analysisSettings(file, capture) : undefined), [file, capture]);
  const of = useMemo(() => readOnly(file, capture?.id ?? null), [file, capture]);
  const above = (
    <div className="screen-only mb-2 grid gap-2">
      <p className="font-sans text-label text-quiet">
        {statusWords[file.status]}, shared by {file.team}, read only
      </p>
      {file.captures.length > 1 && (
        <CaptureNav
          items={file.captures.map(({ id, name, summary }) => ({ key: id, name, verdict: summary?.verdict ?? null }))}
          current={capture ? { key: capture.id } : null}
          onChoose={setChosen}
        />
      )}
    </div>
  );
  if (capture === null || source === null || settings === undefined) {
    return (
      <div className="mx-auto max-w-[90rem] px-4 py-5 sm:px-10">
        {above}
        <h1 className="font-serif text-head">{file.title}</h1>
        {file.finding !== "" && <p className="mt-3 max-w-[68ch] whitespace-pre-wrap font-serif text-lede">{file.finding}</p>}
        {trouble !== null ? (
          <Notice kind="broken" title="The capture could not be fetched" actions={<Button onClick={again}>Try again</Button>}>
            {trouble}
          </Notice>
        ) : (
          <p className="mt-3 font-serif text-body text-quiet">
            {capture === null
              ? "No capture belongs to this case."
              : capture.archive_size === null
                ? "This capture has not been decoded yet."
                : "Fetching the capture …"}
          </p>
        )}
      </div>
    );
  }
  return (
    <Bench
      key={capture.id}
      source={source}
      title={file.title}
      settings={settings}
      confirmed
      of={of}
      initialView={chosen === ordinalOf(shared.view) ? shared.view : ""}
      above={above}
      actions={
        <>
          <Button look="word" onClick={() => window.print()}>
            Brief
          </Button>
          <a href={`${below}/report`} className="font-sans text-label">
            Report
          </a>
          {shared.raw_allowed && (
            <a href={`${below}/raw`} className="font-sans text-label">
              Original
            </a>
          )}
        </>
      }
    />
  );
}
