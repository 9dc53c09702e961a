import type { Contest, Summary } from "@/lib/diagnosis/report";
import { count, probability } from "@/lib/view/format";
import { byName } from "@/lib/view/race";
import { Evidence } from "./Evidence";
import { MarginHead } from "./MarginHead";

function name(summary: Summary, id: string | null): string {
  const row = summary.controllers.find((controller) => controller.id === id);
  return row ? (row.name ?? row.id) : "unknown";
}

export interface ContestPartProps {
  contest: Contest;
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** How sure a contest is and on what that rests. */
export function ContestPart({ contest, summary, onGo }: ContestPartProps) {
  const { retry } = contest;
  return (
    <section>
      <MarginHead aside={contest.grade}>Contest in {count(contest.transaction)}</MarginHead>
      <p className="mt-1 font-serif text-[2.25rem] leading-[2.5rem] text-contest">{probability(contest.probability)}</p>
      <Evidence evidence={contest.evidence} />
      <p className="mt-1 font-sans text-small text-quiet">Bits of evidence for and against, from log-odds.</p>
      <dl className="mt-2 grid grid-cols-[auto_1fr] gap-x-3 font-serif text-body">
        <dt className="italic text-quiet">kept the bus</dt>
        <dd>{name(summary, contest.kept)}</dd>
        <dt className="italic text-quiet">yielded</dt>
        <dd>{name(summary, contest.yielded)}</dd>
        <dt className="italic text-quiet">deciding bit</dt>
        <dd>
          {contest.bit_index} (byte {contest.byte}, bit {contest.bit})
        </dd>
        <dt className="italic text-quiet">retry</dt>
        <dd>
          {retry === null ? (
            "none in this record"
          ) : (
            <button type="button" onClick={() => onGo(retry)} className="border-b border-field hover:border-ink">
              {count(retry)}
            </button>
          )}
        </dd>
      </dl>
      {contest.look_alikes.length > 0 && (
        <div className="mt-3">
          <MarginHead>Instead of a contest?</MarginHead>
          {contest.look_alikes.map((other) => (
            <p key={other.kind} className="mt-1 font-serif text-body">
              {other.kind.replaceAll("-", " ")} <span className="tabular text-hex">{probability(other.probability)}</span>.{" "}
              {byName(summary, other.detail)}
            </p>
          ))}
        </div>
      )}
    </section>
  );
}
