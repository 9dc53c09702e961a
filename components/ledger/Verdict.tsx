import { FaultShape, Tick, UndecidedShape } from "@/components/ui/Icon";
import type { Measurement } from "@/lib/diagnosis/report";
import { count } from "@/lib/view/format";

export type Verdict = NonNullable<Measurement["verdict"]>;

/** The analysis' own verdict; where an older summary has none, what its counts say. */
export function verdictOf(row: Measurement): Verdict {
  if (row.verdict) return row.verdict;
  if (row.count === 0) return "not-seen";
  if (row.below + row.above > 0) return "fail";
  return row.uncertain > 0 ? "too-close" : "pass";
}

export function VerdictWords({ row }: { row: Measurement }) {
  switch (verdictOf(row)) {
    case "fail":
      return (
        <span className="text-broken">
          <FaultShape /> {count(row.below + row.above)}{" "}
          {row.below > 0 && row.above > 0 ? "outside" : row.below > 0 ? "below" : "above"}
        </span>
      );
    case "too-close":
      return (
        <span>
          <UndecidedShape /> {count(row.uncertain + (row.unproven ?? 0))} too close to call
        </span>
      );
    case "pass":
      return (
        <span>
          <Tick /> within
        </span>
      );
    case "not-measurable":
      return <span className="text-quiet">cannot be measured here</span>;
    case "no-limit":
      return <span className="text-quiet">no limit</span>;
    case "not-seen":
      return <span className="text-quiet">did not occur</span>;
  }
}
