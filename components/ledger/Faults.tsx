import { FaultShape } from "@/components/ui/Icon";
import { HARMLESS_WORDS } from "@/lib/diagnosis/harmless";
import type { Fault, FaultKind, Harmless, Summary } from "@/lib/diagnosis/report";
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
  const harmless = summary.harmless ?? [];
  return (
    <div>
      {summary.faults.length === 0 && <p className="py-4 font-serif text-body text-quiet">No fault was found in this record.</p>}
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
      {harmless.length > 0 && <HarmlessOnes harmless={harmless} onGo={onGo} />}
    </div>
  );
}

/** Places listed of what is no fault. */
const FEW = 8;

/** What looks like a fault and is none, named so that nobody hunts for it. */
function HarmlessOnes({ harmless, onGo }: { harmless: readonly Harmless[]; onGo: (transaction: number) => void }) {
  return (
    <section aria-label="Harmless, and no fault" className="keep-together mt-6">
      <h3 className="border-b border-ink font-serif text-lg italic">Harmless, and no fault</h3>
      <dl className="mt-2 grid gap-x-8 gap-y-3 font-sans text-label lg:grid-cols-2">
        {harmless.map(({ kind, count: times, places }) => {
          const at = [...new Set(places.map((place) => place.transaction))].filter((index) => index !== null);
          return (
            <div key={kind}>
              <dt>
                {HARMLESS_WORDS[kind].title} <span className="tabular text-hex text-quiet">{count(times)}</span>
              </dt>
              <dd className="text-quiet">
                {HARMLESS_WORDS[kind].meaning}
                {at.length > 0 && (
                  <span className="screen-only block">
                    {at.length > FEW ? "First in " : "In "}
                    {at.slice(0, FEW).map((index) => (
                      <button
                        key={index}
                        type="button"
                        onClick={() => onGo(index)}
                        className="mr-2 border-b border-field text-ink hover:border-ink"
                      >
                        {count(index)}
                      </button>
                    ))}
                  </span>
                )}
              </dd>
            </div>
          );
        })}
      </dl>
    </section>
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
