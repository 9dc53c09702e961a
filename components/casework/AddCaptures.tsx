"use client";

import { useState } from "react";
import { DropPlace } from "@/components/intake/DropPlace";
import { PickedFiles } from "@/components/intake/PickedFile";
import { resume, send, unfinished, usable, usePicking, useUnfinished } from "@/components/intake/picking";
import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";

/** The way of further captures into a case that is open. */
export function AddCaptures({ caseNumber }: { caseNumber: number }) {
  const [open, setOpen] = useState(false);
  return (
    <>
      <Button look="word" onClick={() => setOpen(true)}>
        Add a capture
      </Button>
      <Dialog
        open={open}
        onOpenChange={setOpen}
        title="Add a capture to this case"
        description="Another recording of the same trouble: before and after, near and far end, with and without the second controller."
      >
        {open && <Form caseNumber={caseNumber} onDone={() => setOpen(false)} />}
      </Dialog>
    </>
  );
}

function Form({ caseNumber, onDone }: { caseNumber: number; onDone: () => void }) {
  const picking = usePicking();
  const uploads = useUnfinished().filter((upload) => upload.case === caseNumber);
  const take = (files: readonly File[]) => {
    const begun = files.filter((file) => {
      const upload = unfinished(file, uploads);
      if (upload) resume(file, upload);
      return upload !== undefined;
    });
    if (begun.length < files.length) picking.take(files.filter((file) => !begun.includes(file)));
    else onDone();
  };
  return (
    <form
      className="grid gap-5"
      onSubmit={(event) => {
        event.preventDefault();
        send(picking.files, caseNumber);
        onDone();
      }}
    >
      <DropPlace onFiles={take} />
      <PickedFiles picking={picking} />
      {picking.files.length > 0 && (
        <div>
          <Button look="solid" type="submit" disabled={!picking.files.some(usable)}>
            Add to the case
          </Button>
        </div>
      )}
    </form>
  );
}
