"use client";

import { useCallback, useEffect, useMemo, useRef, useState } from "react";
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
import { type Item, useItems } from "./items";
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
  const [item, choose] = useChosen(items);
  const [sharing, setSharing] = useState(false);
  const tags = useSWR("/api/fault-tags", (path) => ask({ path, answer: FaultTagListSchema }));
  const catalogue = useMemo(() => tags.data?.fault_tags ?? [], [tags.data]);
  const keeping = useKeeping(items, view.may.includes("capture.upload"), refresh);
  const openDialog = useCallback(() => setSharing(true), []);

  const above = (
    <div className="screen-only mb-3 grid gap-2">
      <CaseHead view={view} edit={handle.edit} />
      {items.map(
        ({ transfer, key }) => transfer && transfer.view().state !== "done" && <TransferLine key={key} transfer={transfer} />,
      )}
      {items.length > 1 && (
        <CaptureNav
          items={items.map(({ key, name, capture }) => ({ key, name, verdict: capture?.summary?.verdict ?? null }))}
          current={item}
          onChoose={choose}
        />
      )}
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
          <p className="mt-3 font-serif text-lede">This case holds no capture. Add one above, or conclude it without.</p>
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

function asked(): number {
  const ordinal = Number(new URLSearchParams(window.location.search).get("capture"));
  return Number.isInteger(ordinal) && ordinal > 0 ? ordinal : 1;
}

function write(query: URLSearchParams, ordinal: number): void {
  if (ordinal === 1) query.delete("capture");
  else query.set("capture", String(ordinal));
  const text = query.toString();
  window.history.replaceState(window.history.state, "", `${window.location.pathname}${text === "" ? "" : `?${text}`}`);
}

/**
 * Which capture is open. It is held by its key, because those on their way have no number yet and one that stands still is
 * overtaken; its number stands in the address bar and follows.
 */
function useChosen(items: readonly Item[]): [Item | null, (ordinal: number) => void] {
  const [key, setKey] = useState<string | null>(null);
  const place = items.findIndex((item) => item.key === key);
  const seen = useRef<ReadonlySet<string> | null>(null);
  useEffect(() => {
    // What somebody here adds is opened; what somebody else adds only joins the row.
    const added = seen.current && items.find((item) => item.transfer !== null && !seen.current?.has(item.key));
    seen.current = new Set(items.map((item) => item.key));
    if (added) {
      write(new URLSearchParams(), items.indexOf(added) + 1);
      setKey(added.key);
      return;
    }
    if (items.length === 0) return;
    if (place === -1) setKey((items[asked() - 1] ?? items[0]).key);
    else if (asked() !== place + 1) write(new URLSearchParams(window.location.search), place + 1);
  }, [items, place]);
  // Another capture is another view: what was selected in the last one means nothing here.
  const choose = (ordinal: number) => {
    write(new URLSearchParams(), ordinal);
    setKey(items[ordinal - 1].key);
  };
  return [items[place] ?? items[0] ?? null, choose];
}
