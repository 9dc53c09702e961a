"use client";

import { type ReactNode, useEffect, useRef, useState } from "react";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import type { Source } from "@/workers/protocol";
import { Bench } from "./Bench";
import { Cautions } from "./Cautions";
import { Drop } from "./Drop";

export interface FrontDoorProps {
  /** Links beside an opened capture: to keep it in a case, or to sign in. */
  keep?: ReactNode;
}

/** Reads a capture in the browser for anybody. Nothing leaves the browser here. */
export function FrontDoor({ keep }: FrontDoorProps) {
  const [source, setSource] = useState<Source | null>(null);
  const [confirmed, setConfirmed] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  const top = useRef<HTMLDivElement>(null);

  useEffect(() => {
    if (source) top.current?.focus();
  }, [source]);

  function take(files: readonly File[]) {
    const [file] = files;
    if (!file) return;
    setTrouble(null);
    setConfirmed(false);
    setSource({ kind: "file", blob: file, name: file.name });
  }

  async function sample() {
    setBusy(true);
    setTrouble(null);
    try {
      const answer = await fetch(new URL("./sample.csv.gz", import.meta.url));
      if (!answer.ok) throw new Error(`the server answered ${answer.status}`);
      setConfirmed(true);
      setSource({ kind: "file", blob: await answer.blob(), name: "tank4-valve-write.csv.gz" });
    } catch (error) {
      setTrouble(error instanceof Error ? error.message : String(error));
    }
    setBusy(false);
  }

  if (source) {
    return (
      <div ref={top} tabIndex={-1} className="focus-visible:outline-none">
        <Bench
          key={source.name}
          source={source}
          title={source.name}
          confirmed={confirmed}
          actions={
            <>
              {keep}
              <Button look="word" onClick={() => setSource(null)}>
                another capture
              </Button>
            </>
          }
        />
      </div>
    );
  }
  return (
    <div className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
      <h1 className="max-w-[24ch] font-serif text-[2.5rem] leading-[1.1]">Whoever puts a low on the bus first, stays</h1>
      <p className="mt-4 max-w-[62ch] font-serif text-lede">
        Lay a capture of SCL and SDA here. Firstlow reads it, draws every transaction from its own edges on one time scale,
        measures it against the published limits, and tells a real lost arbitration from the many things that only look like one.
        It is read in this browser; nothing is sent anywhere until you save it.
      </p>
      <div className="mt-8">
        <Drop onFiles={take} onSample={sample} busy={busy} />
      </div>
      {trouble && (
        <div className="mt-4">
          <Notice kind="broken" title="The sample could not be fetched">
            <p>{trouble}</p>
          </Notice>
        </div>
      )}
      <div className="mt-8">
        <Cautions />
      </div>
    </div>
  );
}
