"use client";

import { type ReactNode, useMemo, useState } from "react";
import { Bench } from "@/components/bench/Bench";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import { analysisSettings } from "@/lib/case/analysis";
import type { FaultTagFile, LimitsChoice } from "@/lib/case/case";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { editable } from "./annotations";
import { readOnServer } from "./archive";
import { type Item, localSource } from "./items";
import { LogImport } from "./LogImport";
import { SettingsDialog } from "./SettingsDialog";
import { useArchive } from "./useArchive";
import type { CaseHandle } from "./useCase";

export interface CaptureBenchProps {
  item: Item;
  handle: CaseHandle;
  me: string;
  catalogue: readonly FaultTagFile[];
  above: ReactNode;
  onShare: () => void;
}

/** One capture of a case on the bench: from the local file while that is at hand, else from its archive in storage. */
export function CaptureBench({ item, handle, me, catalogue, above, onShare }: CaptureBenchProps) {
  const { view, refresh } = handle;
  const { capture, transfer } = item;
  const local = transfer ? localSource(transfer) : null;
  const kept = useArchive(local ? null : capture, `/api/captures/${capture?.id}/archive`);
  const settings = useStable(analysisSettings(view, { read: capture?.read ?? transfer?.read ?? {}, log: capture?.log ?? null }));
  const [read, setRead] = useState<ReadChoices | null>(null);
  const shown = useStable(read === null ? settings : { ...settings, read });

  const change = async (next: AnalysisSettings) => {
    const limits: LimitsChoice | null =
      next.limits === settings.limits
        ? null
        : typeof next.limits === "string"
          ? { kind: "built-in", name: next.limits }
          : { kind: "automatic" };
    const judged = limits !== null || next.cb_pf !== settings.cb_pf;
    const reread = JSON.stringify(next.read) !== JSON.stringify(shown.read);
    if (judged) await handle.edit({ settings: { ...view.settings, ...(limits && { limits }), cb_pf: next.cb_pf } });
    if (transfer) {
      transfer.choose(next.read);
      setRead(next.read);
    } else if (capture && (reread || judged)) {
      await readOnServer(capture.id, next.read, capture.log);
      await refresh();
    }
  };

  const source = local ?? kept.source;
  if (source === null) {
    return (
      <div className="mx-auto max-w-[90rem] px-4 py-5 sm:px-10">
        {above}
        <h1 className="font-serif text-head">{view.title}</h1>
        <div className="mt-4">
          <Waiting item={item} trouble={kept.trouble} again={kept.again} />
        </div>
      </div>
    );
  }
  return (
    <Bench
      source={source}
      title={view.title}
      settings={shown}
      onSettings={view.may.includes("case.edit") || transfer ? (next) => void change(next) : undefined}
      confirmed={transfer === null}
      of={editable(handle, capture?.id ?? null, me, catalogue)}
      above={above}
      actions={<Actions item={item} handle={handle} onShare={onShare} />}
    />
  );
}

function Actions({ item, handle, onShare }: Pick<CaptureBenchProps, "item" | "handle" | "onShare">) {
  const { may } = handle.view;
  const { capture } = item;
  const [dialog, setDialog] = useState<"settings" | "log" | null>(null);
  return (
    <>
      {may.includes("case.edit") && (
        <Button look="word" onClick={() => setDialog("settings")}>
          Limits and roster
        </Button>
      )}
      {capture && may.includes("capture.upload") && (
        <Button look="word" onClick={() => setDialog("log")}>
          {capture.log === null ? "Attach a log" : "Log"}
        </Button>
      )}
      <SettingsDialog open={dialog === "settings"} onOpenChange={(open) => setDialog(open ? "settings" : null)} handle={handle} />
      {capture && (
        <LogImport
          open={dialog === "log"}
          onOpenChange={(open) => setDialog(open ? "log" : null)}
          capture={capture}
          onKept={handle.refresh}
        />
      )}
      {may.includes("brief.print") && (
        <Button look="word" onClick={() => window.print()}>
          Brief
        </Button>
      )}
      {capture?.summary && (
        <a href={`/api/captures/${capture.id}/report`} className="font-sans text-label">
          Report
        </a>
      )}
      {capture && may.includes("capture.download") && (
        <a href={`/api/captures/${capture.id}/raw`} className="font-sans text-label">
          Original
        </a>
      )}
      {may.includes("share.create") && (
        <Button look="word" onClick={onShare}>
          Share
        </Button>
      )}
    </>
  );
}

function Waiting({ item, trouble, again }: { item: Item; trouble: string | null; again: () => void }) {
  if (trouble !== null) {
    return (
      <Notice kind="broken" title="The capture could not be fetched" actions={<Button onClick={again}>Try again</Button>}>
        {trouble}
      </Notice>
    );
  }
  const waits = item.capture !== null && item.capture.archive_size === null;
  return (
    <p role="status" className="font-serif text-body text-quiet">
      {waits ? "This capture has not been decoded to its end yet." : "Fetching the capture …"}
    </p>
  );
}

/** The same object as before while it says the same, so that nothing is read anew for it. */
function useStable<T>(value: T): T {
  const text = JSON.stringify(value);
  // biome-ignore lint/correctness/useExhaustiveDependencies: the text stands for the value
  return useMemo(() => value, [text]);
}
