import type { Contest } from "@/lib/diagnosis/report";
import { evidenceBits } from "@/lib/view/format";

const KIND_WORDS: Record<Contest["evidence"][number]["kind"], string> = {
  "drive-tap": "drive tap",
  "low-level": "low level",
  "clock-sync": "clock changes",
  start: "START held short",
  "data-timing": "data timing",
  retry: "retry follows",
  log: "controller log",
};

const WIDTH = 116;

/** Signed bars of log-odds: hatched to the right for the contest, open to the left against it. */
export function Evidence({ evidence }: { evidence: Contest["evidence"] }) {
  const reach = Math.max(1, ...evidence.map((entry) => Math.abs(entry.bits)));
  const against = Math.max(0, ...evidence.map((entry) => -entry.bits));
  const zero = against === 0 ? 1 : Math.max(12, (against / (reach + against)) * WIDTH);
  const perBit = Math.min((WIDTH - zero - 1) / reach, against === 0 ? Number.POSITIVE_INFINITY : (zero - 1) / against);
  return (
    <ul className="mt-1 font-sans text-label">
      {evidence.map((entry) => {
        const length = Math.max(1.5, Math.abs(entry.bits) * perBit);
        return (
          <li
            key={`${entry.kind}${entry.detail}`}
            className="grid grid-cols-[1fr_auto_3rem] items-center gap-x-2 py-[3px]"
            title={entry.detail}
          >
            <span>{KIND_WORDS[entry.kind]}</span>
            <svg width={WIDTH} height="15" aria-hidden="true">
              <path d={`M${zero} 0V15`} className="stroke-ink" strokeWidth="1" />
              <rect
                x={entry.bits < 0 ? zero - length : zero}
                y="3.5"
                width={length}
                height="8"
                strokeWidth="1"
                className={entry.bits < 0 ? "fill-none stroke-quiet" : "stroke-contest"}
                fill={entry.bits < 0 ? undefined : "url(#evidence-hatch)"}
              />
            </svg>
            <span className="tabular text-right text-hex">{evidenceBits(entry.bits)}</span>
          </li>
        );
      })}
    </ul>
  );
}
