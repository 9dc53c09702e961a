"use client";

import { useEffect, useMemo, useState } from "react";
import { Evidence } from "@/components/margin/Evidence";
import { MarginHead } from "@/components/margin/MarginHead";
import { Button } from "@/components/ui/Button";
import type { Contest, Summary } from "@/lib/diagnosis/report";
import type { Capture } from "@/lib/view/capture";
import { count, evidenceBits, probability } from "@/lib/view/format";
import { byName, type Race, raceOf } from "@/lib/view/race";
import { blindSentences, raceSentences, settlings } from "@/lib/view/race-words";
import { Ask, answerTo } from "./Ask";
import { BitRace } from "./BitRace";
import { ContestList } from "./ContestList";
import { RaceTable } from "./RaceTable";

export interface ContestReadingProps {
  capture: Capture;
  /** Devices by address. */
  names: ReadonlyMap<number, string>;
  onGo: (transaction: number) => void;
  selected: number | null;
}

/** The reading of contests: one drawn bit by bit with what speaks for and against it, and the list of all. */
export function ContestReading({ capture, names, onGo, selected }: ContestReadingProps) {
  const { summary } = capture;
  const [chosen, setChosen] = useState<number | null>(null);
  const contested = capture.marks.contested;
  useEffect(() => {
    if (selected !== null && contested.includes(selected)) setChosen(selected);
  }, [selected, contested]);
  const shown = chosen ?? contested[0] ?? null;
  const race = useMemo(
    () => (summary && shown !== null ? raceOf(capture.ledger, summary, shown) : null),
    [capture, summary, shown],
  );
  if (summary === null) return null;
  return (
    <div className="pt-3">
      {race ? (
        <OneRace key={race.transaction} race={race} summary={summary} device={deviceOf(capture, race, names)} onGo={onGo} />
      ) : (
        <p className="py-2 font-serif text-body text-quiet">
          No contest was found in this record. That says nothing about contests that leave no trace on these lines.
        </p>
      )}
      <ContestList capture={capture} summary={summary} chosen={shown} onChoose={setChosen} onGo={onGo} />
      <Blind summary={summary} />
    </div>
  );
}

/** What was looked for in vain and could not have been found: silence about it is no proof. */
function Blind({ summary }: { summary: Summary }) {
  const sentences = blindSentences(summary);
  if (sentences.length === 0) return null;
  return (
    <section aria-label="What these lines cannot show" className="screen-only mt-6 max-w-[60rem]">
      <h3 className="border-b border-ink font-serif text-[1.0625rem] italic">What these lines cannot show</h3>
      {sentences.map((sentence) => (
        <p key={sentence} className="mt-1 font-serif text-body">
          {sentence}
        </p>
      ))}
    </section>
  );
}

function deviceOf(capture: Capture, race: Race, names: ReadonlyMap<number, string>): string | null {
  return names.get(capture.ledger.row(race.transaction).address) ?? null;
}

interface OneRaceProps {
  race: Race;
  summary: Summary;
  device: string | null;
  onGo: (transaction: number) => void;
}

function OneRace({ race, summary, device, onGo }: OneRaceProps) {
  const [text, setText] = useState("");
  const asked = answerTo(race, text);
  const last = race.leavers[race.leavers.length - 1];
  const { contest } = last;
  return (
    <article className="keep-together">
      <h2 className="font-serif text-[1.625rem] leading-8">Contest in {count(race.transaction)}, drawn bit by bit</h2>
      <p className="mb-2 mt-1 max-w-[58rem] font-serif text-lede">
        {raceSentences(race)}
        {device !== null && ` The address is that of ${device}.`}
      </p>
      <p className="screen-only mb-3 flex flex-wrap gap-x-5 font-sans text-label">
        <Button look="word" onClick={() => onGo(race.transaction)}>
          Transaction {count(race.transaction)} in its row
        </Button>
        {contest.retry !== null && (
          <Button look="word" onClick={() => onGo(contest.retry ?? race.transaction)}>
            Its retry, {count(contest.retry)}
          </Button>
        )}
      </p>
      <BitRace race={race} asked={asked.answer ? { name: last.name, answer: asked.answer } : null} />
      <RaceTable race={race} />
      <Ask name={last.name} text={text} onText={setText} asked={asked} />
      {race.leavers.map((leaver) => (
        <Sureness
          key={leaver.contest.bit_index}
          contest={leaver.contest}
          summary={summary}
          name={race.leavers.length > 1 ? leaver.name : null}
        />
      ))}
    </article>
  );
}

/** How sure, on what that rests, what else it could be, and what would settle it. */
function Sureness({ contest, summary, name }: { contest: Contest; summary: Summary; name: string | null }) {
  const open = settlings(contest, summary);
  return (
    <div className="mt-6 grid gap-x-10 gap-y-5 lg:grid-cols-2">
      <section>
        <MarginHead aside={contest.grade}>How sure{name === null ? "" : `, ${name}`}</MarginHead>
        <p className="mt-1 font-serif text-[2.25rem] leading-[2.5rem] text-contest">{probability(contest.probability)}</p>
        <Evidence evidence={contest.evidence} />
        <ul className="mt-2 space-y-1 font-serif text-body">
          {contest.evidence.map((entry) => (
            <li key={`${entry.kind}${entry.detail}`}>
              <span className="tabular text-hex text-quiet">{evidenceBits(entry.bits)}</span> {byName(summary, entry.detail)}
            </li>
          ))}
        </ul>
        <p className="mt-1 font-sans text-small text-quiet">Bits of evidence for and against, from log-odds.</p>
      </section>
      <div className="space-y-5">
        {contest.look_alikes.length > 0 && (
          <section>
            <MarginHead>Instead of a contest?</MarginHead>
            {contest.look_alikes.map((other) => (
              <p key={other.kind} className="mt-1 font-serif text-body">
                {other.kind.replaceAll("-", " ").replace(/\b(sda|scl)\b/g, (line) => line.toUpperCase())}{" "}
                <span className="tabular text-hex">{probability(other.probability)}</span>. {byName(summary, other.detail)}
              </p>
            ))}
          </section>
        )}
        <section>
          <MarginHead>{open.length === 0 ? "Nothing left open" : "Why not certain, and what would settle it"}</MarginHead>
          {open.length === 0 ? (
            <p className="mt-1 font-serif text-body">A drive tap shows it: SDA was let go while the bus was low.</p>
          ) : (
            <ul className="mt-1 space-y-1.5 font-serif text-body">
              <li>On the wire only the AND of all drivers is visible, so this is inferred.</li>
              {open.map((entry) => (
                <li key={entry.text}>
                  {entry.text}
                  {entry.bits !== null && (
                    <span className="tabular ml-1.5 whitespace-nowrap text-hex text-contest">
                      up to {evidenceBits(entry.bits)} bits
                    </span>
                  )}
                </li>
              ))}
            </ul>
          )}
        </section>
      </div>
    </div>
  );
}
