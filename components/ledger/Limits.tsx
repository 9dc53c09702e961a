import { Button } from "@/components/ui/Button";
import { FaultShape, Tick, UndecidedShape } from "@/components/ui/Icon";
import { Cell, Table } from "@/components/ui/Table";
import type { Measurement, Summary } from "@/lib/diagnosis/report";
import { count, duration } from "@/lib/view/format";

const COLUMNS = [
  { key: "parameter", head: "interval" },
  { key: "count", head: "measured", number: true },
  { key: "min", head: "least", number: true },
  { key: "p50", head: "median", number: true },
  { key: "max", head: "most", number: true },
  { key: "limit", head: "limit", number: true },
  { key: "range", head: <span className="sr-only">drawn</span> },
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

/** The measured range as a line with its median, the limits as uprights; logarithmic, since intervals span decades. */
function Range({ row }: { row: Measurement }) {
  if (row.min_s === null || row.max_s === null || row.max_s <= 0) return null;
  const known = [row.min_s, row.max_s, row.p50_s, row.limit_min_s, row.limit_max_s].filter(
    (value) => value !== null && value > 0,
  );
  const positive = known as number[];
  const least = Math.log(Math.min(...positive) / 1.3);
  const most = Math.log(Math.max(...positive) * 1.3);
  const x = (value: number) => (((value <= 0 ? least : Math.log(value)) - least) / Math.max(1e-9, most - least)) * WIDTH;
  const tone = row.below + row.above > 0 ? "stroke-broken" : "stroke-ink";
  return (
    <svg width={WIDTH} height="16" aria-hidden="true" className="block">
      {row.limit_min_s !== null && row.limit_min_s > 0 && (
        <path d={`M${x(row.limit_min_s) + 4} 1.5H${x(row.limit_min_s)}V14.5h4`} fill="none" className="stroke-quiet" />
      )}
      {row.limit_max_s !== null && (
        <path d={`M${x(row.limit_max_s) - 4} 1.5H${x(row.limit_max_s)}V14.5h-4`} fill="none" className="stroke-quiet" />
      )}
      <path d={`M${x(row.min_s)} 8H${Math.max(x(row.max_s), x(row.min_s) + 1.5)}`} strokeWidth="2" className={tone} />
      {row.p50_s !== null && <path d={`M${x(row.p50_s)} 4V12`} className={tone} />}
    </svg>
  );
}

function Verdict({ row, judged }: { row: Measurement; judged: boolean }) {
  const broken = row.below + row.above;
  if (!judged || (row.limit_min_s === null && row.limit_max_s === null)) return <span className="text-quiet">not judged</span>;
  if (broken > 0) {
    const side = row.below > 0 && row.above > 0 ? "outside" : row.below > 0 ? "below" : "above";
    return (
      <span className="whitespace-nowrap text-broken">
        <FaultShape /> {count(broken)} {side}
      </span>
    );
  }
  if (row.uncertain > 0) {
    return (
      <span className="whitespace-nowrap">
        <UndecidedShape /> {count(row.uncertain)} too close to call
      </span>
    );
  }
  return (
    <span className="whitespace-nowrap">
      <Tick /> within
    </span>
  );
}

export interface LimitsProps {
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** Every interval of the specification's tables that occurred, against its limit; a broken one leads to its worst place. */
export function Limits({ summary, onGo }: LimitsProps) {
  const judged = summary.capture.time_base !== "assumed";
  const rank = (row: Measurement) => (row.below + row.above > 0 ? 0 : row.uncertain > 0 ? 1 : 2);
  const rows = [...summary.measurements].sort((a, b) => rank(a) - rank(b));
  if (rows.length === 0) return <p className="py-4 font-serif text-body text-quiet">Nothing could be measured in this record.</p>;
  return (
    <Table caption={`Measured against ${summary.limits.profile}, ${summary.limits.source}`} captioned columns={COLUMNS}>
      {rows.map((row) => {
        const worst = summary.violations.find((entry) => entry.parameter === row.parameter)?.transaction ?? null;
        return (
          <tr key={row.parameter}>
            <th scope="row" className="py-1.5 pr-5 text-left font-normal">
              <span className="tabular text-hex">{row.parameter}</span>
            </th>
            <Cell number>{count(row.count)}</Cell>
            <Cell number className={row.below > 0 ? "font-semibold text-broken" : ""}>
              {figure(row.min_s)}
            </Cell>
            <Cell number>{figure(row.p50_s)}</Cell>
            <Cell number className={row.above > 0 ? "font-semibold text-broken" : ""}>
              {figure(row.max_s)}
            </Cell>
            <Cell number>{limitWords(row)}</Cell>
            <Cell className="align-middle">
              <Range row={row} />
            </Cell>
            <Cell>
              <Verdict row={row} judged={judged} />
              {worst !== null && (
                <Button look="word" className="screen-only ml-3 text-small" onClick={() => onGo(worst)}>
                  worst, {count(worst)}
                </Button>
              )}
            </Cell>
          </tr>
        );
      })}
    </Table>
  );
}
