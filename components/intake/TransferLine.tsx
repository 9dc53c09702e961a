"use client";

import { useSyncExternalStore } from "react";
import { Button } from "@/components/ui/Button";
import { unshelve } from "./shelf";
import { size } from "./size";
import type { Transfer, TransferState } from "./transfer";

const words: Record<TransferState, string> = {
  waiting: "waiting",
  sending: "on its way to storage",
  paused: "paused",
  offline: "waiting for the connection",
  checking: "being checked",
  done: "kept",
  failed: "not kept",
  cancelled: "cancelled",
};

/** How far one file is, as a rule that fills, with what can be done about it. */
export function TransferLine({ transfer }: { transfer: Transfer }) {
  const view = useSyncExternalStore(transfer.subscribe, transfer.view, transfer.view);
  const share = view.size === 0 ? 0 : Math.floor((view.sent / view.size) * 100);
  const moving = view.state === "sending" || view.state === "offline";
  return (
    <section className="py-1.5 font-sans text-label" aria-label={`Upload of ${view.name}`}>
      <div className="flex flex-wrap items-baseline gap-x-5 gap-y-1">
        <span className="tabular text-hex">{view.name}</span>
        <span className={view.state === "failed" ? "text-broken" : "text-quiet"} aria-live="polite">
          {words[view.state]}
          {view.state !== "done" && view.state !== "failed" && `, ${share} % of ${size(view.size)}`}
        </span>
        {moving && (
          <Button look="word" onClick={() => transfer.pause()}>
            Pause
          </Button>
        )}
        {(view.state === "paused" || view.state === "failed") && (
          <Button look="word" onClick={() => transfer.start()}>
            {view.state === "paused" ? "Go on" : "Try again"}
          </Button>
        )}
        {view.state !== "done" && view.state !== "cancelled" && (
          <Button look="word" onClick={() => void transfer.cancel().then(() => unshelve(transfer))}>
            Cancel
          </Button>
        )}
      </div>
      {view.message !== "" && <p className="mt-1 font-serif text-body">{view.message}</p>}
      {view.state !== "done" && (
        <progress
          className="mt-1 block h-[3px] w-full appearance-none border-0 bg-hairline [&::-moz-progress-bar]:bg-accent [&::-webkit-progress-bar]:bg-hairline [&::-webkit-progress-value]:bg-accent"
          value={view.sent}
          max={view.size}
        >
          {share} %
        </progress>
      )}
    </section>
  );
}
