import type { ReactNode } from "react";
import type { FaultKind, Summary } from "@/lib/diagnosis/report";
import { FAULT_WORDS } from "@/lib/diagnosis/wording";
import type { Capture } from "@/lib/view/capture";
import { count, duration, span } from "@/lib/view/format";
import { CAPTURE_WORDS } from "@/lib/view/words";

function Fact({ children }: { children: ReactNode }) {
  return <li className="whitespace-nowrap">{children}</li>;
}

function Figure({ children }: { children: ReactNode }) {
  return <span className="tabular text-hex text-ink">{children}</span>;
}

function totals(summary: Summary | null): [FaultKind, number][] {
  const counted = new Map<FaultKind, number>();
  for (const fault of summary?.faults ?? []) counted.set(fault.kind, (counted.get(fault.kind) ?? 0) + 1);
  // The list is bounded, the totals are not.
  for (const kind of counted.keys()) counted.set(kind, summary?.fault_totals?.[kind] ?? counted.get(kind) ?? 0);
  return [...counted];
}

function sum(entries: readonly [FaultKind, number][]): number {
  return entries.reduce((total, [, number]) => total + number, 0);
}

function failing(summary: Summary | null): number {
  return sum(totals(summary).filter(([kind]) => FAULT_WORDS[kind].fails));
}

function all(summary: Summary | null): number {
  return sum(totals(summary));
}

/** The capture in figures, one line. */
export function Facts({ capture }: { capture: Capture }) {
  const { head, summary, ledger } = capture;
  const { record } = capture;
  const faults = failing(summary);
  const remarks = all(summary) - faults;
  const contests = summary ? summary.contests.length : 0;
  return (
    <ul className="flex flex-wrap gap-x-6 gap-y-1 font-sans text-label text-quiet">
      <Fact>
        <Figure>{span(record.to - record.from, head.timebase)}</Figure> recorded
      </Fact>
      <Fact>
        <Figure>{count(ledger.length)}</Figure> transactions
      </Fact>
      {summary && (
        <>
          <Fact>
            <Figure>{count(contests)}</Figure> {contests === 1 ? "contest" : "contests"}
          </Fact>
          <Fact>
            <Figure>{count(faults)}</Figure> {faults === 1 ? "fault" : "faults"}
          </Fact>
          {remarks > 0 && (
            <Fact>
              <Figure>{count(remarks)}</Figure> worth knowing
            </Fact>
          )}
          <Fact>
            judged by <Figure>{summary.limits.profile}</Figure>
            {summary.limits.source && `, ${summary.limits.source}`}: {CAPTURE_WORDS[summary.verdict]}
          </Fact>
        </>
      )}
      {head.sampleTicks !== null && head.timebase.origin !== "assumed" && (
        <Fact>
          sampled every <Figure>{duration(head.sampleTicks / head.timebase.ticksPerSecond)}</Figure>
        </Fact>
      )}
    </ul>
  );
}
