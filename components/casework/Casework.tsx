"use client";

import { useCallback, useEffect, useMemo, useState } from "react";
import useSWR from "swr";
import { TransferLine } from "@/components/intake/TransferLine";
import { ShareDialog } from "@/components/share/ShareDialog";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import { FaultTagListSchema } from "@/lib/case/catalogue";
import type { CaseView } from "@/lib/case/wire";
import { ask } from "./api";
import { CaptureBench } from "./CaptureBench";
import { CaptureNav } from "./CaptureNav";
import { CaseHead } from "./CaseHead";
import { ConflictDialog } from "./ConflictDialog";
import { useItems } from "./items";
import { useCase } from "./useCase";
import { useKeeping } from "./useKeeping";

export interface CaseworkProps {
  initial: CaseView;
  /** Name of whoever works here, to know one's own notes. */
  me: string;
}

/** One case as a member works on it: its captures on the bench, with everything that people put on them. */
export function Casework({ initial, me }: CaseworkProps) {
  const handle = useCase(initial);
  const { view, refresh } = handle;
  const items = useItems(view.number, view.captures, refresh);
  const [chosen, choose] = useChosen();
  const [sharing, setSharing] = useState(false);
  const tags = useSWR("/api/fault-tags", (path) => ask({ path, answer: FaultTagListSchema }));
  const catalogue = useMemo(() => tags.data?.fault_tags ?? [], [tags.data]);
  const keeping = useKeeping(items, view.may.includes("capture.upload"), refresh);
  const item = items[Math.min(chosen, items.length) - 1] ?? items[0] ?? null;
  const openDialog = useCallback(() => setSharing(true), []);

  const above = (
    <div className="screen-only mb-3 grid gap-2">
      <CaseHead view={view} edit={handle.edit} />
      {items.map(
        ({ transfer, key }) => transfer && transfer.view().state !== "done" && <TransferLine key={key} transfer={transfer} />,
      )}
      {items.length > 1 && <CaptureNav items={items} current={item} onChoose={choose} />}
      {keeping.trouble !== null && (
        <Notice
          kind="broken"
          title="A decoded capture could not be kept"
          actions={<Button onClick={keeping.again}>Try again</Button>}
        >
          {keeping.trouble}
        </Notice>
      )}
      {handle.trouble !== null && (
        <Notice kind="broken" title="That was not saved" actions={<Button onClick={handle.dismissTrouble}>Close</Button>}>
          {handle.trouble}
        </Notice>
      )}
    </div>
  );
  return (
    <>
      {item === null ? (
        <div className="mx-auto max-w-[90rem] px-4 py-5 sm:px-10">
          {above}
          <h1 className="font-serif text-head">{view.title}</h1>
          <p className="mt-3 font-serif text-lede">This case holds no capture. Add one, or conclude it without.</p>
        </div>
      ) : (
        <CaptureBench
          key={item.key}
          item={item}
          handle={handle}
          me={me}
          catalogue={catalogue}
          above={above}
          onShare={openDialog}
        />
      )}
      <ConflictDialog conflict={handle.conflict} settle={handle.settle} />
      {view.may.includes("share.create") && (
        <ShareDialog
          open={sharing}
          onOpenChange={setSharing}
          caseNumber={view.number}
          view={() => window.location.search.replace(/^\?/, "")}
        />
      )}
    </>
  );
}

/** Which capture is open, counted from 1, kept in the address bar. */
function useChosen(): [number, (ordinal: number) => void] {
  const [chosen, setChosen] = useState(1);
  useEffect(() => {
    const asked = Number(new URLSearchParams(window.location.search).get("capture"));
    if (Number.isInteger(asked) && asked > 0) setChosen(asked);
  }, []);
  const choose = useCallback((ordinal: number) => {
    setChosen(ordinal);
    // Another capture is another view: what was selected in the last one means nothing here.
    window.history.replaceState(
      window.history.state,
      "",
      `${window.location.pathname}${ordinal === 1 ? "" : `?capture=${ordinal}`}`,
    );
  }, []);
  return [chosen, choose];
}
