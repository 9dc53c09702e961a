"use client";

import { useRouter } from "next/navigation";
import { type DragEvent, type FormEvent, useEffect, useRef, useState } from "react";
import useSWR from "swr";
import { DecodeClient } from "@/components/bench/client";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { TEXT_LIMIT } from "@/lib/case/case";
import { type Upload, UploadListSchema } from "@/lib/case/upload";
import { CaseViewSchema } from "@/lib/case/wire";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import { Cautions } from "../bench/Cautions";
import { fetchCarried } from "./carry";
import { PickedFile } from "./PickedFile";
import { shelve } from "./shelf";
import { size } from "./size";
import { Transfer } from "./transfer";

/** A file as it was picked, and how the engine understands it so far. */
export interface Picked {
  readonly file: File;
  readonly preview: CapturePreview | null;
  /** Our own fault while looking into it; the file may be fine. */
  readonly crashed: string | null;
}

function titleFrom(name: string): string {
  return name
    .replace(/(\.gz)?$/i, "")
    .replace(/\.[^.]+$/, "")
    .replaceAll(/[_-]+/g, " ")
    .slice(0, TEXT_LIMIT.title);
}

/** Whether the person can go on with this file: it reads, or only a question stands open that the case page asks. */
function usable(picked: Picked): boolean {
  return picked.preview !== null && picked.preview.problem === null;
}

/** Where a case begins: files are picked or dropped, looked into, and opened as one case while they upload. */
export function Intake() {
  const router = useRouter();
  const [files, setFiles] = useState<readonly Picked[]>([]);
  const [title, setTitle] = useState("");
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [over, setOver] = useState(false);
  const input = useRef<HTMLInputElement>(null);
  const client = useRef<DecodeClient | null>(null);
  const unfinished = useSWR("/api/uploads", (path) => ask({ path, answer: UploadListSchema }));
  const uploads = unfinished.data?.uploads.filter((upload) => upload.state === "open") ?? [];

  useEffect(() => () => client.current?.stop(), []);

  // biome-ignore lint/correctness/useExhaustiveDependencies: once, when the page opens
  useEffect(() => {
    // A browser that keeps no such store (a private window, say) simply carries nothing.
    fetchCarried().then(
      (file) => file && take([file]),
      () => undefined,
    );
  }, []);

  const look = async (file: File) => {
    client.current ??= new DecodeClient();
    let found: Partial<Picked>;
    try {
      found = { preview: await client.current.preview({ kind: "file", blob: file, name: file.name }, {}) };
    } catch (error) {
      found = { crashed: wordsOf(error) };
    }
    setFiles((now) => now.map((picked) => (picked.file === file ? { ...picked, ...found } : picked)));
  };

  const take = (added: readonly File[]) => {
    const resumed = added.map((file) => ({ file, upload: uploads.find((u) => u.name === file.name && u.size === file.size) }));
    for (const { file, upload } of resumed) if (upload) goOn(file, upload);
    const fresh = resumed.filter(({ upload }) => !upload).map(({ file }) => file);
    if (fresh.length === 0) return;
    setFiles((now) => [...now, ...fresh.map((file) => ({ file, preview: null, crashed: null }))]);
    if (title === "") setTitle(titleFrom(fresh[0].name));
    for (const file of fresh) void look(file);
  };

  const goOn = (file: File, upload: Upload) => {
    const transfer = new Transfer(file, upload.case, upload.id);
    shelve(transfer);
    transfer.start();
    router.push(`/cases/${upload.case}`);
  };

  const open = async (event: FormEvent) => {
    event.preventDefault();
    setBusy(true);
    try {
      const view = await ask({ method: "POST", path: "/api/cases", body: { title }, answer: CaseViewSchema });
      for (const { file } of files.filter(usable)) {
        const transfer = new Transfer(file, view.number, null);
        shelve(transfer);
        transfer.start();
      }
      router.push(`/cases/${view.number}`);
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  };

  const drop = (event: DragEvent) => {
    event.preventDefault();
    setOver(false);
    take([...event.dataTransfer.files]);
  };

  return (
    <form onSubmit={(event) => void open(event)} className="grid max-w-3xl gap-8">
      <section
        aria-label="Captures"
        onDragOver={(event) => {
          event.preventDefault();
          setOver(true);
        }}
        onDragLeave={() => setOver(false)}
        onDrop={drop}
        className={`border-y py-10 text-center ${over ? "border-accent bg-accent/5" : "border-field"}`}
      >
        <p className="font-serif text-lede">Drop the exports of SCL and SDA here, CSV or VCD, also compressed with gzip.</p>
        <div className="mt-4">
          <Button onClick={() => input.current?.click()}>Pick files</Button>
          <input
            ref={input}
            type="file"
            multiple
            accept=".csv,.vcd,.txt,.tsv,.gz"
            aria-label="Capture files"
            className="sr-only"
            tabIndex={-1}
            onChange={(event) => {
              take([...(event.target.files ?? [])]);
              event.target.value = "";
            }}
          />
        </div>
      </section>
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
      {files.map((picked) => (
        <PickedFile
          key={`${picked.file.name}-${picked.file.size}-${picked.file.lastModified}`}
          picked={picked}
          onRemove={() => setFiles((now) => now.filter((other) => other !== picked))}
        />
      ))}
      {files.length > 0 && (
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
            <Button look="solid" type="submit" busy={busy} disabled={!files.some(usable) || title.trim() === ""}>
              Open the case
            </Button>
          </div>
        </div>
      )}
      <Cautions />
    </form>
  );
}
