import { TONE_CLASS } from "@/components/stack/StackRow";
import type { Capture } from "@/lib/view/capture";
import { address, count, hex, instant, timeDigits } from "@/lib/view/format";
import { transactionsIn } from "@/lib/view/hit";
import type { Row } from "@/lib/view/ledger";
import type { Bounds } from "@/lib/view/scale";
import { verdicts } from "@/lib/view/words";

export interface InViewProps {
  capture: Capture;
  span: Bounds;
  selected: number | null;
  names: ReadonlyMap<number, string>;
  onSelect: (transaction: number) => void;
}

const LISTED = 40;
const BYTES = 12;

function bytesOf(capture: Capture, row: Row): string {
  const bytes = capture.ledger.bytes(row, BYTES + row.addressBytes).slice(row.addressBytes);
  const more = row.byteCount - row.addressBytes - bytes.length;
  return `${bytes.map((byte) => hex(byte.value)).join(" ")}${more > 0 ? ` and ${count(more)} more` : ""}`;
}

/** The transactions under the part of the strip that is shown, one line each; only counted while there are many. */
export function InView({ capture, span, selected, names, onSelect }: InViewProps) {
  const { ledger, marks, head } = capture;
  const { first, end } = transactionsIn(ledger, span.from, span.to);
  const total = Math.max(0, end - first);
  const digits = Math.min(7, timeDigits(head.timebase, head.sampleTicks));
  if (total === 0) return <p className="mt-4 font-serif text-body text-quiet">No transaction in view.</p>;
  if (total > LISTED) {
    return (
      <p className="mt-4 font-serif text-body text-quiet">
        {count(total)} transactions in view; look nearer to have them listed.
      </p>
    );
  }
  return (
    <ol className="mt-4 border-t border-ink font-sans text-label">
      {Array.from({ length: total }, (_, k) => {
        const row = ledger.row(first + k);
        const words = verdicts(row, marks.of(row.index), marks);
        return (
          <li key={row.index} className="border-b border-hairline">
            <button
              type="button"
              onClick={() => onSelect(row.index)}
              aria-current={row.index === selected}
              className="grid w-full grid-cols-[3rem_6.6rem_3rem_1rem_minmax(0,1fr)] sm:grid-cols-[3.5rem_7.5rem_3.5rem_1.5rem_minmax(0,1fr)_auto] items-baseline gap-x-2 py-1 text-left hover:bg-ink/5 aria-[current=true]:shadow-[inset_3px_0_0_rgb(var(--accent))]"
            >
              <span className="pl-2 font-serif text-body text-quiet">{count(row.index)}</span>
              <span className="tabular text-hex">{instant(row.startTick, head.timebase, digits)}</span>
              <span className="tabular text-hex" title={names.get(row.address)}>
                {address(row.address, row.addressBits)}
              </span>
              <span className="tabular text-hex">{row.direction ?? "·"}</span>
              <span className="tabular truncate text-hex">{bytesOf(capture, row)}</span>
              <span
                className={`hidden truncate font-serif text-body italic sm:inline ${words[0] ? TONE_CLASS[words[0].tone] : ""}`}
              >
                {words[0]?.text}
              </span>
            </button>
          </li>
        );
      })}
    </ol>
  );
}
