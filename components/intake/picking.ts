"use client";

import { useEffect, useRef, useState } from "react";
import useSWR from "swr";
import { DecodeClient, makeReady } from "@/components/bench/client";
import { useReadyDecoder } from "@/components/bench/ready";
import { ask, wordsOf } from "@/components/casework/api";
import { type Upload, UploadListSchema } from "@/lib/case/upload";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { shelve } from "./shelf";
import { Transfer, type TransferState } from "./transfer";

/** A file as it was picked, and how the engine understands it so far. */
export interface Picked {
  readonly file: File;
  /** What the person answered about it. */
  readonly read: ReadChoices;
  readonly preview: CapturePreview | null;
  /** Our own fault while looking into it; the file may be fine. */
  readonly crashed: string | null;
}

/** Whether the person can go on with this file: the engine can read it, as it stands or with the answers given. */
export function usable(picked: Picked): boolean {
  return picked.preview !== null && picked.preview.problem === null;
}

export interface Picking {
  readonly files: readonly Picked[];
  take(files: readonly File[], read?: ReadChoices): void;
  /** Looks into a file again with other answers. */
  answer(picked: Picked, read: ReadChoices): void;
  leaveOut(picked: Picked): void;
}

/** Files picked or dropped, each looked into in a worker, before they go anywhere. */
export function usePicking(): Picking {
  const [files, setFiles] = useState<readonly Picked[]>([]);
  const client = useRef<DecodeClient | null>(null);
  useReadyDecoder();
  useEffect(
    () => () => {
      client.current?.stop();
      client.current = null;
    },
    [],
  );

  const look = async (file: File, read: ReadChoices) => {
    client.current ??= new DecodeClient();
    let found: Partial<Picked>;
    try {
      found = { preview: await client.current.preview({ kind: "file", blob: file, name: file.name }, read) };
    } catch (error) {
      found = { crashed: wordsOf(error) };
    }
    setFiles((now) => now.map((picked) => (picked.file === file && picked.read === read ? { ...picked, ...found } : picked)));
  };

  const put = (picked: Picked) => {
    setFiles((now) =>
      now.some(({ file }) => file === picked.file)
        ? now.map((other) => (other.file === picked.file ? picked : other))
        : [...now, picked],
    );
    void look(picked.file, picked.read);
  };

  return {
    files,
    take(added, read = {}) {
      for (const file of added) put({ file, read, preview: null, crashed: null });
    },
    answer: ({ file }, read) => put({ file, read, preview: null, crashed: null }),
    leaveOut: (picked) => setFiles((now) => now.filter(({ file }) => file !== picked.file)),
  };
}

/** Sends what can be read on its way into a case, one after the other, so that they are numbered as they were picked. */
export function send(files: readonly Picked[], caseNumber: number): void {
  const queue = files.filter(usable).map(({ file, read }) => {
    const transfer = new Transfer(file, caseNumber, null);
    transfer.choose(read);
    shelve(transfer);
    return transfer;
  });
  startNext(queue);
  // For the page of the case, which reads the file as it travels.
  makeReady();
}

const UNDER_WAY: readonly TransferState[] = ["waiting", "sending", "checking"];

/** Starts the first that still waits; the one after it once that has arrived, or stands still for whatever reason. */
function startNext(queue: readonly Transfer[]): void {
  const place = queue.findIndex((transfer) => transfer.view().state === "waiting");
  if (place === -1) return;
  const transfer = queue[place];
  const end = transfer.subscribe(() => {
    if (UNDER_WAY.includes(transfer.view().state)) return;
    end();
    startNext(queue.slice(place + 1));
  });
  transfer.start();
}

/** Goes on with an upload that did not finish, from the same file. */
export function resume(file: File, { id, case: caseNumber }: Upload): void {
  const transfer = new Transfer(file, caseNumber, id);
  shelve(transfer);
  transfer.start();
}

/** The unfinished upload of this very file, as far as name and size tell. */
export function unfinished(file: File, uploads: readonly Upload[]): Upload | undefined {
  return uploads.find((upload) => upload.name === file.name && upload.size === file.size);
}

/** One's own uploads that did not finish. */
export function useUnfinished(): readonly Upload[] {
  const { data } = useSWR("/api/uploads", (path) => ask({ path, answer: UploadListSchema }));
  return data?.uploads.filter((upload) => upload.state === "open") ?? [];
}
