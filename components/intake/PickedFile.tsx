import { Answers } from "@/components/bench/Answers";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import type { Picked, Picking } from "./picking";
import { size } from "./size";

/** The files picked so far, each with what it turns out to be. */
export function PickedFiles({ picking }: { picking: Picking }) {
  return picking.files.map((picked) => (
    <PickedFile
      key={`${picked.file.name}-${picked.file.size}-${picked.file.lastModified}`}
      picked={picked}
      onRead={(read) => picking.answer(picked, read)}
      onRemove={() => picking.leaveOut(picked)}
    />
  ));
}

interface PickedFileProps {
  picked: Picked;
  onRead: (read: Picked["read"]) => void;
  onRemove: () => void;
}

/** What a picked file turns out to be, in words, before it is opened; what it takes to read it is asked here. */
function PickedFile({ picked, onRead, onRemove }: PickedFileProps) {
  const { file, read, preview, crashed } = picked;
  return (
    <section aria-label={file.name} className="border-b border-hairline pb-4">
      <div className="flex flex-wrap items-baseline gap-x-5 gap-y-1 font-sans text-label">
        <span className="tabular text-hex">{file.name}</span>
        <span className="text-quiet">{size(file.size)}</span>
        <Button look="word" className="ml-auto" onClick={onRemove}>
          Leave out
        </Button>
      </div>
      <div className="mt-1 font-serif text-body" aria-live="polite">
        {preview === null && crashed === null && <p className="text-quiet">Looking into the file …</p>}
        {crashed !== null && (
          <Notice kind="broken" title="Our decoder failed on this file">
            {crashed}
          </Notice>
        )}
        {preview?.problem && (
          <Notice kind="broken" title={preview.problem.message}>
            <p>{preview.problem.advice}</p>
            <Answers read={read} preview={preview} onRead={onRead} />
          </Notice>
        )}
        {preview !== null && preview.problem === null && preview.proposal !== null && (
          <>
            <p>
              {preview.format === "vcd" ? "A VCD" : "A CSV"}
              {preview.gzip && ", compressed"} with {preview.channels.length} usable{" "}
              {preview.channels.length === 1 ? "channel" : "channels"}. {preview.proposal.reason}
            </p>
            {preview.preview !== null && <p className="tabular mt-1 text-hex text-quiet">begins {preview.preview.firstBytes}</p>}
          </>
        )}
      </div>
    </section>
  );
}
