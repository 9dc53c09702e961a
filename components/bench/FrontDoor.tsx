"use client";

import { useRouter } from "next/navigation";
import { useEffect, useRef, useState } from "react";
import { carry } from "@/components/intake/carry";
import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { Source } from "@/workers/protocol";
import { Bench, FRESH_SETTINGS } from "./Bench";
import { Cautions } from "./Cautions";
import { Drop } from "./Drop";
import { SAMPLE_NAME, SAMPLE_SETTINGS, SAMPLE_TITLE, SAMPLE_URL } from "./sample";

export interface FrontDoorProps {
  /** Where an opened capture is kept in a case, by signing in first where that is needed. */
  keep: { readonly href: string; readonly text: string };
}

/** What lies on the bench. */
interface Laid {
  readonly source: Source;
  readonly title: string;
  readonly settings: AnalysisSettings;
  readonly confirmed: boolean;
}

/** Reads a capture in the browser for anybody. Nothing leaves the browser here. */
export function FrontDoor({ keep }: FrontDoorProps) {
  const [laid, setLaid] = useState<Laid | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  const router = useRouter();
  const top = useRef<HTMLDivElement>(null);

  useEffect(() => {
    if (laid) top.current?.focus({ preventScroll: true });
  }, [laid]);

  function take([file]: readonly File[]) {
    if (!file) return;
    setTrouble(null);
    setLaid({
      source: { kind: "file", blob: file, name: file.name },
      title: file.name,
      settings: FRESH_SETTINGS,
      confirmed: false,
    });
  }

  async function keepIt({ source, settings }: Laid) {
    try {
      await carry(source.blob, source.name, settings.read);
      router.push(keep.href);
    } catch (error) {
      setTrouble(error instanceof Error ? error.message : String(error));
    }
  }

  async function sample() {
    setBusy(true);
    setTrouble(null);
    try {
      const answer = await fetch(SAMPLE_URL);
      if (!answer.ok) throw new Error(`The server answered ${answer.status}.`);
      const source: Source = { kind: "file", blob: await answer.blob(), name: SAMPLE_NAME };
      setLaid({ source, title: SAMPLE_TITLE, settings: SAMPLE_SETTINGS, confirmed: true });
    } catch (error) {
      setTrouble(error instanceof Error ? error.message : String(error));
    }
    setBusy(false);
  }

  function clear() {
    window.history.replaceState(window.history.state, "", window.location.pathname);
    setLaid(null);
  }

  if (laid) {
    return (
      <div ref={top} tabIndex={-1} className="focus-visible:outline-none">
        <Bench
          source={laid.source}
          title={laid.title}
          settings={laid.settings}
          onSettings={(settings) => setLaid({ ...laid, settings })}
          confirmed={laid.confirmed}
          actions={
            <>
              <Button look="word" onClick={() => void keepIt(laid)}>
                {keep.text}
              </Button>
              <Button look="word" onClick={clear}>
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
