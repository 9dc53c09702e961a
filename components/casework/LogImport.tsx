"use client";

import { useMemo, useState } from "react";
import { CodeMeanings } from "@/components/strip/CodeMeanings";
import { Button } from "@/components/ui/Button";
import { Dialog } from "@/components/ui/Dialog";
import { TextField } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { type CaptureFile, TEXT_LIMIT } from "@/lib/case/case";
import { readLog } from "@/lib/diagnosis/log";
import type { LogEntry } from "@/lib/forensics/contract";
import { reportsLoss } from "@/lib/forensics/log-match";
import { count, duration } from "@/lib/view/format";
import { wordsOf } from "./api";
import { readOnServer } from "./archive";

export interface LogImportProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  capture: CaptureFile;
  /** Called once the capture was judged with the log, or without it. */
  onKept: () => Promise<void>;
}

/** What a controller wrote about itself, beside what stood on the wires: text or CSV, on whatever clock it had. */
export function LogImport({ open, onOpenChange, capture, onKept }: LogImportProps) {
  return (
    <Dialog
      open={open}
      onOpenChange={onOpenChange}
      title="Controller log"
      description={`What a controller or its driver wrote while ${capture.name} was recorded. Its clock need not agree: the offset is found from the events themselves.`}
    >
      {open && <Form capture={capture} onKept={onKept} onDone={() => onOpenChange(false)} />}
    </Dialog>
  );
}

type Said = { readonly entries: readonly LogEntry[] } | { readonly words: string } | null;

function understood(text: string): Said {
  if (text.trim() === "") return null;
  if (text.length > TEXT_LIMIT.log)
    return {
      words: `The log has ${count(text.length)} characters; at most ${count(TEXT_LIMIT.log)} are kept. Cut it to the time of the capture.`,
    };
  const read = readLog(text);
  if (!read.ok) return { words: `${read.problem.message} ${read.problem.advice}` };
  return read.value.length === 0 ? { words: "The log has no entries." } : { entries: read.value };
}

interface FormProps {
  capture: CaptureFile;
  onKept: () => Promise<void>;
  onDone: () => void;
}

function Form({ capture, onKept, onDone }: FormProps) {
  const [text, setText] = useState(capture.log ?? "");
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  const said = useMemo(() => understood(text), [text]);
  const entries = said !== null && "entries" in said ? said.entries : null;

  async function take(file: File | undefined) {
    if (!file) return;
    if (file.size > 4 * TEXT_LIMIT.log)
      return setTrouble(`${file.name} is too large for a log of one capture; cut it to its time.`);
    setTrouble(null);
    setText((await file.text()).replaceAll("\u0000", ""));
  }

  async function keep(log: string | null) {
    setBusy(true);
    setTrouble(null);
    try {
      await readOnServer(capture.id, capture.read, log);
      await onKept();
      onDone();
    } catch (error) {
      setTrouble(wordsOf(error));
      setBusy(false);
    }
  }

  return (
    <div className="grid gap-5">
      <label className="font-sans text-label text-quiet">
        From a file{" "}
        <input
          type="file"
          accept=".log,.txt,.csv,text/*"
          onChange={(event) => void take(event.target.files?.[0])}
          className="max-w-64"
        />
      </label>
      <TextField
        label="Or its lines"
        rows={8}
        value={text}
        spellCheck={false}
        onChange={(event) => setText(event.target.value)}
        placeholder={"12.345678 gateway: arbitration lost"}
        hint="Lines that begin with a time in seconds, with a unit, or with date and time; or a CSV with the columns time, controller, message."
        error={said !== null && "words" in said ? said.words : undefined}
        className="!font-mono !text-hex"
      />
      <div aria-live="polite">
        {entries && <Understood entries={entries} />}
        {entries && <CodeMeanings messages={entries.map(({ message }) => message)} />}
      </div>
      {trouble !== null && <Notice kind="broken">{trouble}</Notice>}
      <div className="flex flex-wrap gap-5">
        <Button look="solid" busy={busy} disabled={entries === null || text === capture.log} onClick={() => void keep(text)}>
          Judge with it
        </Button>
        {capture.log !== null && (
          <Button look="danger" busy={busy} onClick={() => void keep(null)}>
            Remove the log
          </Button>
        )}
      </div>
    </div>
  );
}

function Understood({ entries }: { entries: readonly LogEntry[] }) {
  const speakers = [...new Set(entries.flatMap(({ controller }) => (controller === null ? [] : [controller])))];
  const losses = entries.filter(reportsLoss).length;
  const times = entries.map(({ time_s }) => time_s);
  const [from, to] = times.reduce(([least, most], time) => [Math.min(least, time), Math.max(most, time)], [times[0], times[0]]);
  return (
    <p className="font-serif text-body">
      {count(entries.length)} {entries.length === 1 ? "line is" : "lines are"} understood, over {duration(to - from)}.{" "}
      {speakers.length === 0
        ? "No line names its controller."
        : `${speakers.length === 1 ? "It speaks" : "They speak"} for ${speakers.slice(0, 6).join(", ")}${speakers.length > 6 ? " and others" : ""}.`}{" "}
      {losses === 0
        ? "None reports lost arbitration, so nothing here can be matched with a contest."
        : `${count(losses)} ${losses === 1 ? "reports" : "report"} lost arbitration.`}
    </p>
  );
}
