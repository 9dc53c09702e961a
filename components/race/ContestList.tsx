"use client";

import { useState } from "react";
import { Button } from "@/components/ui/Button";
import { ContestShape } from "@/components/ui/Icon";
import type { Contest, Summary, TargetContest } from "@/lib/diagnosis/report";
import type { Capture } from "@/lib/view/capture";
import { address, count, instant, probability, timeDigits } from "@/lib/view/format";
import { controllerName } from "@/lib/view/race";

export interface ContestListProps {
  capture: Capture;
  summary: Summary;
  /** Transaction whose race is drawn. */
  chosen: number | null;
  onChoose: (transaction: number) => void;
  onGo: (transaction: number) => void;
}

const PAGE = 40;

/** Every contest, and every place that only looks like one. */
export function ContestList({ capture, summary, chosen, onChoose, onGo }: ContestListProps) {
  const [most, setMost] = useState(PAGE);
  const { contests } = summary;
  const alike = summary.faults.filter((fault) => fault.kind === "look-alike");
  const { timebase, sampleTicks } = capture.head;
  const digits = Math.min(7, timeDigits(timebase, sampleTicks));
  const at = (seconds: number) => instant(seconds * timebase.ticksPerSecond, timebase, digits);
  return (
    <div className="screen-only mt-8 grid gap-x-10 gap-y-6 lg:grid-cols-2">
      <section aria-label="Contests">
        <h3 className="border-b border-ink font-serif text-[1.0625rem] italic">
          Contests <span className="tabular text-hex not-italic text-quiet">{count(contests.length)}</span>
        </h3>
        <ul className="font-sans text-label">
          {contests.slice(0, most).map((contest) => (
            <li key={`${contest.transaction} ${contest.bit_index}`} className="border-b border-hairline">
              <ContestLine
                contest={contest}
                words={partyWords(contest, summary)}
                time={at(contest.start_s)}
                chosen={contest.transaction === chosen}
                onChoose={onChoose}
              />
            </li>
          ))}
        </ul>
        {contests.length > most && (
          <Button look="word" className="mt-2" onClick={() => setMost(most + 5 * PAGE)}>
            {count(contests.length - most)} more
          </Button>
        )}
      </section>
      <section aria-label="Look-alikes">
        <h3 className="border-b border-ink font-serif text-[1.0625rem] italic">
          Look-alikes <span className="tabular text-hex not-italic text-quiet">{count(alike.length)}</span>
        </h3>
        {alike.length === 0 && (
          <p className="mt-1 font-serif text-body text-quiet">
            No place in this record looks like lost arbitration without being a contest.
          </p>
        )}
        <ul className="font-sans text-label">
          {alike.slice(0, most).map((fault) => (
            <li key={`${fault.time_s} ${fault.detail}`} className="flex items-baseline gap-4 border-b border-hairline py-1.5">
              {fault.transaction === null ? (
                <span className="w-12 shrink-0 text-quiet">between</span>
              ) : (
                <button
                  type="button"
                  onClick={() => onGo(fault.transaction ?? 0)}
                  className="w-12 shrink-0 text-left font-serif text-body underline decoration-field underline-offset-4"
                >
                  {count(fault.transaction)}
                </button>
              )}
              <span className="tabular text-hex text-quiet">{at(fault.time_s)}</span>
              <span className="min-w-0">{fault.detail}</span>
            </li>
          ))}
        </ul>
      </section>
      {(summary.target_contests ?? []).length > 0 && (
        <BetweenTargets contests={summary.target_contests ?? []} most={most} at={at} onGo={onGo} />
      )}
    </div>
  );
}

interface BetweenTargetsProps {
  contests: readonly TargetContest[];
  most: number;
  at: (seconds: number) => string;
  onGo: (transaction: number) => void;
}

/** Targets that answered one read at once: lawful, and nothing that a controller notices. */
function BetweenTargets({ contests, most, at, onGo }: BetweenTargetsProps) {
  return (
    <section aria-label="Between targets" className="lg:col-span-2">
      <h3 className="border-b border-ink font-serif text-[1.0625rem] italic">
        Between targets <span className="tabular text-hex not-italic text-quiet">{count(contests.length)}</span>
      </h3>
      <ul className="font-sans text-label">
        {contests.slice(0, most).map((contest) => (
          <li key={contest.transaction} className="flex items-baseline gap-4 border-b border-hairline py-1.5">
            <button
              type="button"
              onClick={() => onGo(contest.transaction)}
              className="w-12 shrink-0 text-left font-serif text-body underline decoration-field underline-offset-4"
            >
              {count(contest.transaction)}
            </button>
            <span className="tabular text-hex text-quiet">{at(contest.start_s)}</span>
            <span className="min-w-0 flex-1">
              {contest.kept !== null &&
                contest.yielded !== null &&
                `${address(contest.kept, 7)} before ${address(contest.yielded, 7)}. `}
              {contest.detail}
            </span>
            <span className="flex items-baseline gap-1.5 text-contest">
              <span className="tabular text-hex">{probability(contest.probability)}</span>
              <span>{contest.grade}</span>
            </span>
          </li>
        ))}
      </ul>
    </section>
  );
}

function partyWords(contest: Contest, summary: Summary): string {
  const kept = controllerName(summary, contest.kept, "one controller");
  const yielded = controllerName(summary, contest.yielded, "another");
  return `${kept} kept the bus, ${yielded} yielded at bit ${count(contest.bit_index)}`;
}

interface ContestLineProps {
  contest: Contest;
  words: string;
  time: string;
  chosen: boolean;
  onChoose: (transaction: number) => void;
}

function ContestLine({ contest, words, time, chosen, onChoose }: ContestLineProps) {
  return (
    <button
      type="button"
      aria-pressed={chosen}
      onClick={() => onChoose(contest.transaction)}
      className={`grid w-full grid-cols-[3.5rem_1fr_auto] items-baseline gap-x-3 border-l-2 py-1.5 pl-2 text-left hover:bg-ink/5 ${chosen ? "border-accent" : "border-transparent"}`}
    >
      <span className="font-serif text-body">{count(contest.transaction)}</span>
      <span className="min-w-0">
        {words}
        <span className="tabular block text-hex text-quiet">{time}</span>
      </span>
      <span className="flex items-baseline gap-1.5 text-contest">
        <ContestShape />
        <span className="tabular text-hex">{probability(contest.probability)}</span>
        <span>{contest.grade}</span>
      </span>
    </button>
  );
}
