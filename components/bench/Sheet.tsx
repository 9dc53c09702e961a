"use client";

import { type ReactNode, useState } from "react";
import { Dialog } from "@/components/ui/Dialog";

/** On a narrow page the margin lies under a line at the foot, and comes up when it is touched. */
export function Sheet({ title, children }: { title: string; children: ReactNode }) {
  const [open, setOpen] = useState(false);
  return (
    <div className="screen-only lg:hidden">
      <button
        type="button"
        onClick={() => setOpen(true)}
        aria-haspopup="dialog"
        className="fixed inset-x-0 bottom-0 z-30 flex items-baseline justify-between border-t border-ink bg-paper px-4 pb-[max(0.75rem,env(safe-area-inset-bottom))] pt-3 text-left font-serif text-body italic"
      >
        <span className="truncate">{title}</span>
        <svg width="12" height="12" viewBox="0 0 12 12" aria-hidden="true" className="shrink-0">
          <path d="M1.5 8.5 6 4l4.5 4.5" fill="none" stroke="currentColor" strokeWidth="1.4" />
        </svg>
      </button>
      <Dialog open={open} onOpenChange={setOpen} title="Beside the trace">
        {children}
      </Dialog>
    </div>
  );
}
