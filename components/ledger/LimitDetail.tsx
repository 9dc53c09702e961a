import type { ReactNode } from "react";
import { duration, figure, rate } from "@/lib/diagnosis/format";
import type { Measurement, Summary } from "@/lib/diagnosis/report";
import { count } from "@/lib/view/format";
import { Distribution } from "./Distribution";

export interface LimitDetailProps {
  row: Measurement;
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** Broken places listed; the ledger's filter shows the rest. */
const WORST = 6;

/** Everything that a figure needs to be quoted: between which points, which limit of which document, at which uncertainty. */
export function LimitDetail({ row, summary, onGo }: LimitDetailProps) {
  const worst = summary.violations.filter((entry) => entry.parameter === row.parameter).slice(0, WORST);
  const limits = [row.limit_min_s, row.limit_max_s];
  return (
    <div className="grid gap-x-8 gap-y-3 pb-4 pt-1 lg:grid-cols-[minmax(0,1fr)_minmax(0,1fr)]">
      <dl className="grid grid-cols-[max-content_minmax(0,1fr)] gap-x-4 gap-y-1 self-start font-sans text-label">
        <Term name="measured">{row.points}</Term>
        <Term name="limit from">{row.clause}</Term>
        <Term name="uncertainty">
          {row.uncertainty_s === undefined
            ? ""
            : row.uncertainty_s > 0
              ? `± ${duration(row.uncertainty_s)} by the sampling`
              : "exact to one step of the file"}
        </Term>
        <Term name="too close">{openWords(row)}</Term>
        <Term name="one threshold">
          {(row.bias_s ?? 0) > 0
            ? `may show up to ${duration(row.bias_s ?? 0)} too much on the slowest edges that the profile allows`
            : ""}
        </Term>
        <Term name="99 of 100">
          {row.p1_s != null && row.p99_s != null ? `from ${figure(row.p1_s, limits)}, up to ${figure(row.p99_s, limits)}` : ""}
        </Term>
        <Term name="needs">{row.needs_rate ? `${rate(row.needs_rate, "S/s")} to judge a value near this limit` : ""}</Term>
        <Term name="note">{row.note ?? ""}</Term>
        <Term name="worst">
          {worst.length === 0 ? (
            ""
          ) : (
            <span className="flex flex-wrap gap-x-4 gap-y-1">
              {worst.map((entry) => (
                <span key={`${entry.time_s}${entry.side}`} className="whitespace-nowrap">
                  <span className="tabular text-hex text-broken">{figure(entry.measured_s, [entry.limit_s])}</span>
                  {entry.transaction !== null && (
                    <>
                      {" in "}
                      <button
                        type="button"
                        onClick={() => onGo(entry.transaction ?? 0)}
                        className="border-b border-field hover:border-ink"
                      >
                        {count(entry.transaction)}
                      </button>
                    </>
                  )}
                </span>
              ))}
            </span>
          )}
        </Term>
      </dl>
      {row.count > 0 && (row.distribution ?? []).length > 0 && <Distribution row={row} />}
    </div>
  );
}

/** How many are open, and by what. */
function openWords({ uncertain, unproven = 0 }: Measurement): string {
  const parts = [
    uncertain > 0 ? `${count(uncertain)} by the sampling` : "",
    unproven > 0 ? `${count(unproven)} that one threshold cannot prove` : "",
  ];
  return parts.filter((part) => part !== "").join(", ");
}

function Term({ name, children }: { name: string; children: ReactNode }) {
  if (children === "" || children === undefined) return null;
  return (
    <>
      <dt className="text-quiet">{name}</dt>
      <dd className="min-w-0">{children}</dd>
    </>
  );
}
