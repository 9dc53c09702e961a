"use client";

import { useState } from "react";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import type { Problem } from "@/lib/base/result";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { count } from "@/lib/view/format";

export interface RefusalProps {
  problem: Problem;
  preview: CapturePreview | null;
  read: ReadChoices;
  onRead: (read: ReadChoices) => void;
  name: string;
}

function placeWords({ place }: Problem): string {
  if (place.line !== undefined) return `line ${count(place.line)}${place.column === undefined ? "" : `, column ${place.column}`}`;
  return place.byte === undefined ? "" : `byte ${count(place.byte)}`;
}

/** The file cannot be read, or not without an answer: what is wrong, where, and what to do about it here and now. */
export function Refusal({ problem, preview, read, onRead, name }: RefusalProps) {
  const where = placeWords(problem);
  return (
    <Notice kind="broken" title={problem.message}>
      <p>{problem.advice}</p>
      <p className="mt-1 font-sans text-small text-quiet">
        {name}
        {where && `, ${where}`}
      </p>
      <Answers read={read} preview={preview} onRead={onRead} />
      {preview && preview.rows.length > 0 && <FirstRows preview={preview} marked={problem.place.line} />}
    </Notice>
  );
}

/** The answers that a reader may need: which channels, how far apart the samples are. */
function Answers({ read, preview, onRead }: Pick<RefusalProps, "read" | "preview" | "onRead">) {
  const [interval, setInterval] = useState("");
  const [scl, setScl] = useState(read.scl ?? "");
  const [sda, setSda] = useState(read.sda ?? "");
  const usable = (preview?.channels ?? []).filter((channel) => channel.kind !== "other");
  if (usable.length < 2) return null;
  const seconds = Number(interval.replace(",", "."));
  const wrong = interval.trim() !== "" && !(seconds > 0 && seconds <= 3600);

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
    <form
      className="mt-3 flex flex-wrap items-end gap-x-6 gap-y-3"
      onSubmit={(event) => {
        event.preventDefault();
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
      }}
    >
      {list("SCL", scl, setScl)}
      {list("SDA", sda, setSda)}
      <div className="w-52">
        <Field
          label="seconds between samples"
          value={interval}
          inputMode="decimal"
          placeholder="1e-7"
          onChange={(event) => setInterval(event.target.value)}
          error={wrong ? "a time above 0, for instance 1e-7" : undefined}
        />
      </div>
      <Button type="submit">read it again</Button>
    </form>
  );
}

function FirstRows({ preview, marked }: { preview: CapturePreview; marked: number | undefined }) {
  return (
    <section aria-label="First rows of the file" className="mt-4 max-w-full overflow-x-auto border-t border-hairline pt-2">
      <table className="tabular text-hex">
        <tbody>
          {preview.rows.slice(0, 14).map((row) => (
            <tr key={row.line} className={row.line === marked ? "text-broken" : row.readings ? "" : "text-quiet"}>
              <th scope="row" className="pr-4 text-right font-normal text-quiet">
                {row.line}
              </th>
              {row.cells.slice(0, 10).map((cell, place) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: cells have no identity but their column
                <td key={place} className="max-w-48 truncate pr-4">
                  {cell}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
