import { FaultShape } from "@/components/ui/Icon";
import type { Fault, FaultKind, Summary } from "@/lib/diagnosis/report";
import { FAULT_WORDS } from "@/lib/diagnosis/wording";
import type { Capture } from "@/lib/view/capture";
import { count, instant, timeDigits } from "@/lib/view/format";
import { faultWords } from "@/lib/view/words";

export interface FaultsProps {
  summary: Summary;
  capture: Capture;
  onGo: (transaction: number) => void;
}

/** Places listed for each kind; the ledger's filter shows the rest. */
const LISTED = 12;

function groups(faults: readonly Fault[]): [FaultKind, Fault[]][] {
  const byKind = new Map<FaultKind, Fault[]>();
  for (const fault of faults) {
    const list = byKind.get(fault.kind);
    if (list) list.push(fault);
    else byKind.set(fault.kind, [fault]);
  }
  return [...byKind].sort((a, b) => b[1].length - a[1].length);
}

/** Faults by kind: what it means, what to do, and where it happened. */
export function Faults({ summary, capture, onGo }: FaultsProps) {
  const { timebase, sampleTicks } = capture.head;
  const digits = Math.min(7, timeDigits(timebase, sampleTicks));
  if (summary.faults.length === 0) {
    return <p className="py-4 font-serif text-body text-quiet">No fault was found in this record.</p>;
  }
  return (
    <div>
      {groups(summary.faults).map(([kind, list]) => (
        <section key={kind} className="keep-together border-b border-hairline py-4">
          <h3
            className={`flex items-baseline gap-2 font-serif text-[1.125rem] ${FAULT_WORDS[kind].fails ? "text-broken" : "text-ink"}`}
          >
            <FaultShape /> <span className="italic">{faultWords(kind)}</span>
            <span className="tabular text-hex text-quiet">{count(list.length)}</span>
          </h3>
          <p className="mt-1 max-w-[68ch] font-serif text-body">
            {FAULT_WORDS[kind].meaning} {FAULT_WORDS[kind].advice}
          </p>
          <ul className="mt-2 grid gap-x-8 font-sans text-label lg:grid-cols-2">
            {list.slice(0, LISTED).map((fault, place) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: two faults of a kind may share every field
              <li key={place} className="flex items-baseline gap-3 py-0.5">
                <Where transaction={fault.transaction} onGo={onGo} />
                <span className="tabular text-hex text-quiet">
                  {instant(fault.time_s * timebase.ticksPerSecond, timebase, digits)}
                </span>
                <span className="min-w-0">{fault.detail}</span>
              </li>
            ))}
          </ul>
          {list.length > LISTED && (
            <p className="mt-1 font-sans text-small text-quiet">and {count(list.length - LISTED)} more places</p>
          )}
        </section>
      ))}
    </div>
  );
}

function Where({ transaction, onGo }: { transaction: number | null; onGo: (transaction: number) => void }) {
  if (transaction === null) return <span className="w-14 shrink-0 text-right text-quiet">between</span>;
  return (
    <button
      type="button"
      onClick={() => onGo(transaction)}
      className="w-14 shrink-0 text-right font-serif text-body underline decoration-field underline-offset-4"
    >
      {count(transaction)}
    </button>
  );
}
