import { FaultShape, Tick, UndecidedShape } from "@/components/ui/Icon";
import { Cell, Table } from "@/components/ui/Table";
import type { Measurement, Summary } from "@/lib/diagnosis/report";
import { count, duration } from "@/lib/view/format";
import { Levels } from "./Levels";

const COLUMNS = [
  { key: "parameter", head: "interval" },
  { key: "count", head: "measured", number: true },
  { key: "min", head: "least", number: true },
  { key: "p50", head: "median", number: true },
  { key: "max", head: "most", number: true },
  { key: "limit", head: "limit", number: true },
  { key: "range", head: <span className="sr-only">drawn</span>, screenOnly: true },
  { key: "verdict", head: "verdict" },
];

function figure(value: number | null): string {
  return value === null ? "–" : duration(value);
}

function limitWords(row: Measurement): string {
  const parts: string[] = [];
  if (row.limit_min_s !== null) parts.push(`at least ${duration(row.limit_min_s)}`);
  if (row.limit_max_s !== null) parts.push(`at most ${duration(row.limit_max_s)}`);
  return parts.join(", ") || "none";
}

const WIDTH = 150;
const HEIGHT = 22;
const BASE = 16;

/** Logarithmic, since intervals span decades: the measured range with its median, how often each length came, the limits. */
function Range({ row }: { row: Measurement }) {
  if (row.min_s === null || row.max_s === null || row.max_s <= 0) return null;
  const known = [row.min_s, row.max_s, row.p50_s, row.limit_min_s, row.limit_max_s];
  const positive = known.filter((value): value is number => value !== null && value > 0);
  const least = Math.log(Math.min(...positive) / 1.3);
  const most = Math.log(Math.max(...positive) * 1.3);
  const x = (value: number) =>
    Math.max(0, ((value <= 0 ? least : Math.log(value)) - least) / Math.max(1e-9, most - least)) * WIDTH;
  const tone = row.below + row.above > 0 ? "stroke-broken" : "stroke-ink";
  const bars = row.distribution ?? [];
  const tallest = Math.max(1, ...bars.map(([, number]) => number));
  return (
    <svg width={WIDTH} height={HEIGHT} aria-hidden="true" className="block">
      <path
        d={bars
          .map(([from, number]) => `M${x(from * 1.044).toFixed(1)} ${BASE}v${(-12 * Math.sqrt(number / tallest)).toFixed(1)}`)
          .join("")}
        className="stroke-field"
        strokeWidth="1.5"
      />
      {row.limit_min_s !== null && row.limit_min_s > 0 && (
        <path
          d={`M${x(row.limit_min_s) + 4} 2.5H${x(row.limit_min_s)}V${HEIGHT - 1.5}h4`}
          fill="none"
          className="stroke-accent"
          strokeWidth="1.3"
        />
      )}
      {row.limit_max_s !== null && (
        <path
          d={`M${x(row.limit_max_s) - 4} 2.5H${x(row.limit_max_s)}V${HEIGHT - 1.5}h-4`}
          fill="none"
          className="stroke-accent"
          strokeWidth="1.3"
        />
      )}
      <path d={`M${x(row.min_s)} ${BASE}H${Math.max(x(row.max_s), x(row.min_s) + 1.5)}`} strokeWidth="2" className={tone} />
      {row.p50_s !== null && <path d={`M${x(row.p50_s)} ${BASE - 4}v8`} className={tone} />}
    </svg>
  );
}

type Verdict = NonNullable<Measurement["verdict"]>;

/** The analysis' own verdict; where an older summary has none, what its counts say. */
function verdictOf(row: Measurement): Verdict {
  if (row.verdict) return row.verdict;
  if (row.count === 0) return "not-seen";
  if (row.below + row.above > 0) return "fail";
  return row.uncertain > 0 ? "too-close" : "pass";
}

const RANK: Record<Verdict, number> = { fail: 0, "too-close": 1, pass: 2, "not-measurable": 3, "no-limit": 4, "not-seen": 5 };

function VerdictWords({ row }: { row: Measurement }) {
  const verdict = verdictOf(row);
  switch (verdict) {
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
          <UndecidedShape /> {count(row.uncertain)} too close to call
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

type Occurrence = Measurement["smallest"];

/** A figure that leads to the place where it was measured. */
function Extreme({
  value,
  at,
  broken,
  onGo,
}: {
  value: number | null;
  at: Occurrence;
  broken: boolean;
  onGo: (transaction: number) => void;
}) {
  const transaction = at?.transaction ?? null;
  const tone = broken ? "font-semibold text-broken" : "";
  if (value === null || transaction === null) {
    return (
      <Cell number className={tone}>
        {figure(value)}
      </Cell>
    );
  }
  return (
    <Cell number className={tone}>
      <button
        type="button"
        onClick={() => onGo(transaction)}
        title={`in transaction ${transaction}`}
        className="border-b border-field hover:border-ink print:border-0"
      >
        {figure(value)}
      </button>
    </Cell>
  );
}

export interface LimitsProps {
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** Every interval of the specification's tables against its limit; least and most lead to where they were measured. */
export function Limits({ summary, onGo }: LimitsProps) {
  const rows = [...summary.measurements].sort((a, b) => RANK[verdictOf(a)] - RANK[verdictOf(b)]);
  if (rows.length === 0) return <p className="py-4 font-serif text-body text-quiet">Nothing could be measured in this record.</p>;
  const both = rows.some((row) => row.traffic === "Hs");
  return (
    <>
      <Table caption={`Measured against ${summary.limits.profile}, ${summary.limits.source}`} captioned columns={COLUMNS}>
        {rows.map((row) => (
          <tr key={`${row.parameter}${row.traffic ?? ""}`}>
            <th
              scope="row"
              className="whitespace-nowrap py-1.5 pr-5 text-left font-normal"
              title={[row.points, row.clause].filter(Boolean).join("; ")}
            >
              <span className="tabular text-hex">{row.parameter.startsWith("f") ? `1/${row.parameter}` : row.parameter}</span>
              {both && row.traffic && <span className="ml-2 text-small text-quiet">{row.traffic}</span>}
            </th>
            <Cell number>{count(row.count)}</Cell>
            <Extreme value={row.min_s} at={row.smallest} broken={row.below > 0} onGo={onGo} />
            <Cell number>{figure(row.p50_s)}</Cell>
            <Extreme value={row.max_s} at={row.largest} broken={row.above > 0} onGo={onGo} />
            <Cell number>{limitWords(row)}</Cell>
            <Cell className="screen-only align-middle">
              <Range row={row} />
            </Cell>
            <Cell className="whitespace-nowrap">
              <VerdictWords row={row} />
            </Cell>
          </tr>
        ))}
      </Table>
      {summary.levels && <Levels levels={summary.levels} />}
      <p className="mt-3 max-w-[80ch] font-sans text-small text-quiet">
        Frequencies are given as their period. A figure nearer to its limit than the sampling can tell is too close to call, never
        a pass or a failure.
      </p>
    </>
  );
}
