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

/** How many are open, and by what: the sampling, or the one threshold. */
function OpenWords({ row }: { row: Measurement }) {
  const unproven = row.unproven ?? 0;
  return (
    <span>
      <UndecidedShape /> {count(row.uncertain + unproven)} too close to call
      {unproven > 0 && <span className="text-quiet">{row.uncertain > 0 ? ", some" : ""} at one threshold</span>}
    </span>
  );
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
      return <OpenWords row={row} />;
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
