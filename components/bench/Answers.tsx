"use client";

import { useState } from "react";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";

export interface AnswersProps {
  preview: CapturePreview | null;
  read: ReadChoices;
  onRead: (read: ReadChoices) => void;
}

/** The answers that a reader may need: which channels, how far apart the samples are. Nothing where there are no two channels. */
export function Answers({ read, preview, onRead }: AnswersProps) {
  const [interval, setInterval] = useState("");
  const [scl, setScl] = useState(read.scl ?? "");
  const [sda, setSda] = useState(read.sda ?? "");
  const usable = (preview?.channels ?? []).filter((channel) => channel.kind !== "other");
  if (usable.length < 2) return null;
  const seconds = Number(interval.replace(",", "."));
  const wrong = interval.trim() !== "" && !(seconds > 0 && seconds <= 3600);

  function answer() {
    if (wrong) return;
    const { scl: _scl, sda: _sda, interval_s: _interval, ...rest } = read;
    onRead({
      ...rest,
      ...(scl ? { scl } : {}),
      ...(sda ? { sda } : {}),
      ...(interval.trim() !== ""
        ? { interval_s: seconds }
        : read.interval_s === undefined
          ? {}
          : { interval_s: read.interval_s }),
    });
  }

  const list = (label: string, value: string, set: (id: string) => void) => (
    <label className="font-sans text-label text-quiet">
      {label}{" "}
      <select
        value={value}
        onChange={(event) => set(event.target.value)}
        className="border-0 border-b border-field bg-transparent py-0.5 text-ink [&>option]:bg-paper"
      >
        <option value="">as found</option>
        {usable.map((channel) => (
          <option key={channel.id} value={channel.id}>
            {channel.name ? `${channel.name} (${channel.id})` : channel.id}
          </option>
        ))}
      </select>
    </label>
  );

  return (
    // No form of its own: it stands inside others.
    <fieldset className="mt-3 flex flex-wrap items-end gap-x-6 gap-y-3">
      <legend className="sr-only">How the file is to be read</legend>
      {list("SCL", scl, setScl)}
      {list("SDA", sda, setSda)}
      <div className="w-52">
        <Field
          label="seconds between samples"
          value={interval}
          inputMode="decimal"
          placeholder="1e-7"
          onChange={(event) => setInterval(event.target.value)}
          onKeyDown={(event) => {
            if (event.key !== "Enter") return;
            event.preventDefault();
            answer();
          }}
          error={wrong ? "a time above 0, for instance 1e-7" : undefined}
        />
      </div>
      <Button onClick={answer}>read it again</Button>
    </fieldset>
  );
}
