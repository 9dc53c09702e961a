"use client";

import { memo, useEffect, useState } from "react";
import { Faults } from "@/components/ledger/Faults";
import { Limits } from "@/components/ledger/Limits";
import { Evidence } from "@/components/margin/Evidence";
import { RowTrace } from "@/components/score/RowTrace";
import type { Summary } from "@/lib/diagnosis/report";
import type { Capture } from "@/lib/view/capture";
import { usualScale } from "@/lib/view/capture";
import { address, count, instant, probability, timeDigits } from "@/lib/view/format";
import { rowScene } from "@/lib/view/row";
import { verdicts } from "@/lib/view/words";
import type { BenchCase } from "./annotations";
import { Cautions } from "./Cautions";
import { unhurried } from "./unhurried";

/** Drawn rows of a printed brief, and their width on A4. */
const DRAWN = 16;
const WIDTH = 640;

/** Transactions worth printing: cited by notes and tags, contested with their retries, then the faulty ones. */
function notable(capture: Capture, of: BenchCase): number[] {
  const list = new Set<number>();
  for (const entry of [...of.notes, ...of.tags]) if (entry.transaction !== null) list.add(entry.transaction);
  for (const contest of capture.summary?.contests ?? []) {
    list.add(contest.transaction);
    if (contest.retry !== null) list.add(contest.retry);
  }
  for (const index of capture.marks.faulty) list.add(index);
  return [...list]
    .filter((index) => index < capture.ledger.length)
    .slice(0, DRAWN)
    .sort((a, b) => a - b);
}

function PrintedRow({
  capture,
  index,
  ticksPerPixel,
  names,
}: {
  capture: Capture;
  index: number;
  ticksPerPixel: number;
  names: ReadonlyMap<number, string>;
}) {
  const { ledger, edges, marks, head } = capture;
  const row = ledger.row(index);
  const own = marks.of(index);
  const beaten = own.retryOf === null ? null : marks.of(own.retryOf);
  const scene = rowScene({ ledger, edges, ticksPerSecond: head.timebase.ticksPerSecond }, row, own, beaten);
  const words = verdicts(row, own, marks)
    .map((verdict) => verdict.text)
    .join(", ");
  return (
    <div className="keep-together border-b border-hairline pt-1">
      <p className="flex gap-4 font-serif text-body">
        <span>{count(index)}</span>
        <span className="tabular text-hex">
          {instant(row.startTick, head.timebase, Math.min(7, timeDigits(head.timebase, head.sampleTicks)))}
        </span>
        <span className="tabular whitespace-nowrap text-hex">
          {address(row.address, row.addressBits)} {row.direction ?? ""}
        </span>
        <span className="text-quiet">{names.get(row.address) ?? ""}</span>
        <span className="ml-auto text-right italic">{words}</span>
      </p>
      <RowTrace scene={scene} ticksPerPixel={ticksPerPixel} shift={0} width={WIDTH} />
    </div>
  );
}

export interface BriefProps {
  capture: Capture;
  of: BenchCase;
  names: ReadonlyMap<number, string>;
}

/** What is printed after lede and facts: the brief of this capture. Drawn once everything on the screen is. */
export function Brief({ capture, of, names }: BriefProps) {
  const [summary, setSummary] = useState<Summary | null>(null);
  useEffect(() => unhurried(() => setSummary(capture.summary)), [capture.summary]);
  // While the capture is read anew there is none of it.
  if (summary === null || summary !== capture.summary) return null;
  return <Printed capture={capture} summary={summary} of={of} names={names} />;
}

/** Its props change with the case, not with the view. */
const Printed = memo(function Printed({ capture, summary, of, names }: BriefProps & { summary: Summary }) {
  const rows = notable(capture, of);
  const scale = usualScale(capture.ledger, WIDTH);
  return (
    <div className="print-only mt-6 space-y-7">
      {of.finding && (
        <section>
          <h2 className="border-b border-ink font-serif text-lg italic">Finding</h2>
          <p className="mt-1 whitespace-pre-wrap font-serif text-body">{of.finding}</p>
        </section>
      )}
      {rows.length > 0 && (
        <section>
          <h2 className="border-b border-ink font-serif text-lg italic">Transactions, one time scale</h2>
          {rows.map((index) => (
            <PrintedRow key={index} capture={capture} index={index} ticksPerPixel={scale} names={names} />
          ))}
        </section>
      )}
      {summary.contests.slice(0, DRAWN).map((contest) => (
        <section key={contest.transaction} className="keep-together max-w-[24rem]">
          <h2 className="border-b border-ink font-serif text-lg italic">
            Contest in {count(contest.transaction)}: {probability(contest.probability)}, {contest.grade}
          </h2>
          <Evidence evidence={contest.evidence} />
        </section>
      ))}
      {of.notes.length > 0 && (
        <section>
          <h2 className="border-b border-ink font-serif text-lg italic">Notes</h2>
          <ol className="mt-1 space-y-1.5 font-serif text-body">
            {of.notes.map((note) => (
              <li key={note.id} className="whitespace-pre-wrap">
                <sup>{note.number}</sup> {note.text}{" "}
                <span className="text-quiet">
                  {note.author}
                  {note.transaction === null ? "" : `, on ${count(note.transaction)}`}
                </span>
              </li>
            ))}
          </ol>
        </section>
      )}
      <Faults summary={summary} capture={capture} onGo={() => undefined} />
      <Limits summary={summary} onGo={() => undefined} />
      <section className="border-t border-ink pt-2">
        <Cautions />
      </section>
    </div>
  );
});
