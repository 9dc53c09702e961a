"use client";

import { Dialog } from "@/components/ui/Dialog";
import { KEY_WORDS } from "./keys";

export function Help({ open, onOpenChange }: { open: boolean; onOpenChange: (open: boolean) => void }) {
  return (
    <Dialog open={open} onOpenChange={onOpenChange} title="Keys">
      <dl className="grid grid-cols-[5rem_1fr] gap-x-4 gap-y-1.5 font-serif text-body">
        {KEY_WORDS.map(([key, words]) => (
          <div key={key} className="contents">
            <dt>
              <kbd>{key}</kbd>
            </dt>
            <dd>{words}</dd>
          </div>
        ))}
      </dl>
      <p className="mt-4 border-t border-hairline pt-3 font-serif text-body text-quiet">
        Over a trace of the stack, Ctrl and the wheel change the scale of all rows, Shift and the wheel move them.
      </p>
    </Dialog>
  );
}
