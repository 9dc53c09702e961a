import type { Measurement } from "@/lib/diagnosis/report";

const WIDTH = 150;
const HEIGHT = 22;
const BASE = 16;

/** Logarithmic, since intervals span decades: the measured range with its median, how often each length came, the limits. */
export function Range({ row }: { row: Measurement }) {
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
