"use client";

import { type DragEvent, useRef, useState } from "react";
import { Button } from "@/components/ui/Button";

/** Where exports are dropped, or picked with the button. */
export function DropPlace({ onFiles }: { onFiles: (files: readonly File[]) => void }) {
  const [over, setOver] = useState(false);
  const input = useRef<HTMLInputElement>(null);
  const drop = (event: DragEvent) => {
    event.preventDefault();
    setOver(false);
    onFiles([...event.dataTransfer.files]);
  };
  return (
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
            onFiles([...(event.target.files ?? [])]);
            event.target.value = "";
          }}
        />
      </div>
    </section>
  );
}
