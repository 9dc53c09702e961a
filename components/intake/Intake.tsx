"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useEffect, useState } from "react";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { TEXT_LIMIT } from "@/lib/case/case";
import type { Upload } from "@/lib/case/upload";
import { CaseViewSchema } from "@/lib/case/wire";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { Cautions } from "../bench/Cautions";
import { fetchCarried } from "./carry";
import { DropPlace } from "./DropPlace";
import { PickedFiles } from "./PickedFile";
import { resume, send, unfinished, usable, usePicking, useUnfinished } from "./picking";
import { size } from "./size";

function titleFrom(name: string): string {
  return name
    .replace(/(\.gz)?$/i, "")
    .replace(/\.[^.]+$/, "")
    .replaceAll(/[_-]+/g, " ")
    .slice(0, TEXT_LIMIT.title);
}

/** Where a case begins: files are picked or dropped, looked into, and opened as one case while they upload. */
export function Intake() {
  const router = useRouter();
  const picking = usePicking();
  const [title, setTitle] = useState("");
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const uploads = useUnfinished();

  // biome-ignore lint/correctness/useExhaustiveDependencies: once, when the page opens
  useEffect(() => {
    // A browser that keeps no such store (a private window, say) simply carries nothing.
    fetchCarried().then(
      (carried) => carried && take([carried.file], carried.read),
      () => undefined,
    );
  }, []);

  const take = (added: readonly File[], read: ReadChoices = {}) => {
    const fresh = added.filter((file) => {
      const begun = unfinished(file, uploads);
      if (begun) goOn(file, begun);
      return begun === undefined;
    });
    if (fresh.length === 0) return;
    picking.take(fresh, read);
    if (title === "") setTitle(titleFrom(fresh[0].name));
  };

  const goOn = (file: File, upload: Upload) => {
    resume(file, upload);
    router.push(`/cases/${upload.case}`);
  };

  const open = async (event: FormEvent) => {
    event.preventDefault();
    setBusy(true);
    try {
      const view = await ask({ method: "POST", path: "/api/cases", body: { title }, answer: CaseViewSchema });
      send(picking.files, view.number);
      router.push(`/cases/${view.number}`);
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  };

  return (
    <form onSubmit={(event) => void open(event)} className="grid max-w-3xl gap-8">
      <DropPlace onFiles={(files) => take(files)} />
      {uploads.length > 0 && (
        <Notice title="Uploads that did not finish">
          <ul>
            {uploads.map((upload) => (
              <li key={upload.id}>
                {upload.name}, {size(upload.size)}, for case {upload.case}:{" "}
                {Math.floor((upload.received.length / upload.parts) * 100)} % arrived. Pick the same file again to go on where it
                stopped.
              </li>
            ))}
          </ul>
        </Notice>
      )}
      <PickedFiles picking={picking} />
      {picking.files.length > 0 && (
        <div className="grid gap-5">
          <Field
            label="Title of the case"
            value={title}
            maxLength={TEXT_LIMIT.title}
            required
            onChange={(event) => setTitle(event.target.value)}
          />
          {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
          <div>
            <Button look="solid" type="submit" busy={busy} disabled={!picking.files.some(usable) || title.trim() === ""}>
              Open the case
            </Button>
          </div>
        </div>
      )}
      <Cautions />
    </form>
  );
}
