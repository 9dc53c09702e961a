"use client";

import { Dialog as Parts } from "radix-ui";
import type { ReactNode } from "react";
import { Cross } from "./Icon";

export interface DialogProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  title: string;
  /** Read out after the title; null where the content says it all. */
  description?: string;
  children: ReactNode;
}

/** A sheet of the same paper laid on the page. Focus stays inside, Escape closes, focus goes back to where it was. */
export function Dialog({ open, onOpenChange, title, description, children }: DialogProps) {
  return (
    <Parts.Root open={open} onOpenChange={onOpenChange}>
      <Parts.Portal>
        <Parts.Overlay className="fixed inset-0 z-40 bg-[rgb(0_0_0/0.45)]" />
        <Parts.Content
          {...(description ? {} : { "aria-describedby": undefined })}
          className="fixed left-1/2 top-1/2 z-50 max-h-[88dvh] w-[min(36rem,94vw)] -translate-x-1/2 -translate-y-1/2 overflow-y-auto border border-ink bg-paper px-7 py-6 text-ink"
        >
          <div className="flex items-baseline justify-between gap-6 border-b border-ink pb-1">
            <Parts.Title className="font-serif text-xl italic">{title}</Parts.Title>
            <Parts.Close aria-label="Close" className="p-1 text-quiet hover:text-ink">
              <Cross />
            </Parts.Close>
          </div>
          {description && <Parts.Description className="mt-3 font-serif text-body text-quiet">{description}</Parts.Description>}
          <div className="mt-4">{children}</div>
        </Parts.Content>
      </Parts.Portal>
    </Parts.Root>
  );
}
