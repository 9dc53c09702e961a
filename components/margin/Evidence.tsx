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

const WIDTH = 100;
/** Bits beyond which a bar is drawn broken off: 12 bits are 4096 to 1, more convinces nobody more. */
const REACH = 12;

function Bar({ bits, zero, perBit }: { bits: number; zero: number; perBit: number }) {
  const length = Math.max(1.5, Math.min(REACH, Math.abs(bits)) * perBit);
  const left = bits < 0 ? zero - length : zero;
  const broken = Math.abs(bits) > REACH;
  return (
    <svg width={WIDTH} height="15" aria-hidden="true">
      <path d={`M${zero} 0V15`} className="stroke-ink" strokeWidth="1" />
      <rect
        x={left}
        y="3.5"
        width={length}
        height="8"
        strokeWidth="1"
        className={bits < 0 ? "fill-none stroke-quiet" : "stroke-contest"}
        fill={bits < 0 ? undefined : "url(#evidence-hatch)"}
      />
      {broken && <path d={`M${left + length * 0.78} 13l4 -11h4l-4 11z`} className="fill-paper stroke-paper" strokeWidth="1.5" />}
    </svg>
  );
}

/** Signed bars of log-odds: hatched to the right for the contest, open to the left against it. */
export function Evidence({ evidence }: { evidence: Contest["evidence"] }) {
  const drawn = evidence.map((entry) => Math.max(-REACH, Math.min(REACH, entry.bits)));
  const most = Math.max(1, ...drawn);
  const least = Math.min(0, ...drawn);
  const perBit = (WIDTH - 3) / (most - least);
  const zero = 1 - least * perBit;
  return (
    <ul className="mt-1 font-sans text-label">
      {evidence.map((entry) => (
        <li
          key={`${entry.kind}${entry.detail}`}
          className="grid grid-cols-[1fr_auto_3.1rem] items-center gap-x-2 py-[3px]"
          title={entry.detail}
        >
          <span>{KIND_WORDS[entry.kind]}</span>
          <Bar bits={entry.bits} zero={zero} perBit={perBit} />
          <span className="tabular text-right text-hex">{evidenceBits(entry.bits)}</span>
        </li>
      ))}
    </ul>
  );
}
