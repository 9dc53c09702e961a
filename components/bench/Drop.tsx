"use client";

import { type DragEvent, useId, useState } from "react";
import { Button, buttonClass } from "@/components/ui/Button";
import { useReadyDecoder } from "./ready";

export interface DropProps {
  onFiles: (files: readonly File[]) => void;
  multiple?: boolean;
  /** Reads the demonstration capture; absent where none is offered. */
  onSample?: () => void;
  busy?: boolean;
}

/** Where a capture is laid down. The whole sheet takes a dropped file, the button opens the picker. */
export function Drop({ onFiles, multiple = false, onSample, busy = false }: DropProps) {
  const [over, setOver] = useState(false);
  const id = useId();

  useReadyDecoder();

  function drop(event: DragEvent) {
    event.preventDefault();
    setOver(false);
    const files = [...event.dataTransfer.files];
    if (files.length > 0) onFiles(multiple ? files : files.slice(0, 1));
  }

  return (
    <section
      aria-label="Lay down a capture"
      onDragOver={(event) => {
        event.preventDefault();
        setOver(true);
      }}
      onDragLeave={() => setOver(false)}
      onDrop={drop}
      className={`border-y py-8 ${over ? "border-accent" : "border-ink"}`}
    >
      <svg
        viewBox="0 0 900 84"
        className="mb-6 block w-full max-w-[56rem]"
        role="img"
        aria-label="Two lines; one steps low first"
      >
        <path
          d="M0 12H150V30H186V12H222V30H258V12H294V30H330V12H366V30H402V12H438V30H474V12H510V30H546V12H582V30H618V12H654V30H690V12H900"
          fill="none"
          className="stroke-ink"
        />
        <path
          d="M0 48H124V70H204V48H276V70H420V48H492V70H636V70H744V48H900"
          fill="none"
          className={over ? "stroke-accent" : "stroke-ink"}
          strokeWidth="2"
        />
        <text x="120" y="83" className="condition fill-ink text-[16px]" textAnchor="middle">
          S
        </text>
        <text x="748" y="83" className="condition fill-ink text-[16px]" textAnchor="middle">
          P
        </text>
      </svg>
      <div className="flex flex-wrap items-baseline gap-x-5 gap-y-3">
        <p className="font-serif text-lede">{over ? "Let go to read it." : "Drop a capture here,"}</p>
        <label
          htmlFor={id}
          className={`${buttonClass("solid")} cursor-pointer focus-within:outline focus-within:outline-2 focus-within:outline-offset-2`}
        >
          pick a file
          <input
            id={id}
            type="file"
            multiple={multiple}
            disabled={busy}
            accept=".csv,.txt,.tsv,.vcd,.gz"
            className="sr-only"
            onChange={(event) => {
              const files = [...(event.target.files ?? [])];
              event.target.value = "";
              if (files.length > 0) onFiles(files);
            }}
          />
        </label>
        {onSample && (
          <Button look="word" onClick={onSample} busy={busy}>
            or try a sample
          </Button>
        )}
      </div>
      <p className="mt-3 max-w-[68ch] font-serif text-body text-quiet">
        CSV as scopes and loggers export it, in volts or 0 and 1, or VCD; gzip of either. Two channels are enough; drive taps and
        other channels may be in the file.
      </p>
    </section>
  );
}
