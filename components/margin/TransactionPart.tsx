import { FAULT_WORDS } from "@/lib/diagnosis/wording";
import type { Capture } from "@/lib/view/capture";
import { address, addressBytes, beside, count, duration, hex, instant, span, timeDigits } from "@/lib/view/format";
import { faultWords } from "@/lib/view/words";
import { MarginHead } from "./MarginHead";

export interface TransactionPartProps {
  capture: Capture;
  index: number;
  device: string | null;
}

const SHOWN = 64;

/** The selected transaction in words and figures, with every fault and every limit it broke. */
export function TransactionPart({ capture, index, device }: TransactionPartProps) {
  const { ledger, head, marks } = capture;
  const row = ledger.row(index);
  const own = marks.of(index);
  const bytes = ledger.bytes(row, SHOWN);
  const base = head.timebase;
  const controller = capture.controller(index);
  const sent = addressBytes(row.address, row.addressBits);
  return (
    <section>
      <MarginHead aside={row.kind === "normal" ? undefined : row.kind.replaceAll("-", " ")}>
        Transaction {count(index)}
      </MarginHead>
      <p className="tabular mt-2 text-hex leading-5 [overflow-wrap:anywhere]">
        <span className="condition text-[1.05rem]">{row.opens}</span>{" "}
        {bytes.map((byte, place) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: bytes have no identity but their place
          <span key={place}>
            {byte.bits < 8 ? `${byte.value.toString(2).padStart(byte.bits, "0")}b` : hex(byte.value)}
            <span className={byte.ack === false && place < row.addressBytes ? "text-broken" : "text-quiet"}>
              {byte.ack === null ? " " : byte.ack ? "\u202fA " : "\u202fN "}
            </span>
          </span>
        ))}
        {row.byteCount > SHOWN && <span className="text-quiet">and {count(row.byteCount - SHOWN)} more </span>}
        {row.closes !== "none" && <span className="condition text-[1.05rem]">{row.closes}</span>}
      </p>
      <dl className="mt-2 grid grid-cols-[auto_1fr] gap-x-3 font-sans text-label">
        <dt className="text-quiet">START at</dt>
        <dd className="tabular text-hex">{instant(row.startTick, base, timeDigits(base, head.sampleTicks))}</dd>
        <dt className="text-quiet">lasts</dt>
        <dd className="tabular text-hex">{span(row.endTick - row.startTick, base)}</dd>
        {index > 0 && row.opens === "S" && (
          <>
            <dt className="text-quiet">after {count(index - 1)}</dt>
            <dd className="tabular text-hex">{span(row.startTick - ledger.endTick(index - 1), base)}</dd>
          </>
        )}
        <dt className="text-quiet">address</dt>
        <dd>
          <span className="tabular text-hex">{address(row.address, row.addressBits)}</span>
          {sent && <span className="text-quiet"> sent as {sent}</span>}
          {device && ` ${device}`}
        </dd>
        {controller && (
          <>
            <dt className="text-quiet">made by</dt>
            <dd>{controller}</dd>
          </>
        )}
      </dl>
      <ul className="mt-2 space-y-2 font-serif text-body">
        {own.faults.map((fault) => (
          <li key={`${fault.kind}${fault.time_s}`}>
            <span className={`italic ${FAULT_WORDS[fault.kind].fails ? "text-broken" : ""}`}>{faultWords(fault.kind)}</span>{" "}
            {fault.detail}
            <span className="block text-quiet">{FAULT_WORDS[fault.kind].advice}</span>
          </li>
        ))}
        {own.violations.map((entry) => (
          <li key={`${entry.parameter}${entry.time_s}`}>
            <span className="italic text-broken">{entry.parameter}</span> is{" "}
            <span className="tabular text-hex">{beside(entry.measured_s, entry.limit_s)}</span>, the limit is{" "}
            {entry.side === "min" ? "at least" : "at most"} <span className="tabular text-hex">{duration(entry.limit_s)}</span>.
          </li>
        ))}
        {own.stretches.map((stretch) => (
          <li key={stretch.start_s}>
            SCL held low <span className="tabular text-hex">{duration(stretch.low_s)}</span> before{" "}
            {stretch.bit === 8 ? "the ninth bit" : `bit ${stretch.bit}`} of byte {stretch.byte},{" "}
            <span className="tabular text-hex">{duration(stretch.excess_s)}</span> longer than usual
            {stretch.by === "unknown" ? "" : `, by the ${stretch.by}`}.
            {stretch.runt_s !== undefined && (
              <>
                {" "}
                The first high after it is a <span className="italic text-broken">runt</span> of{" "}
                <span className="tabular text-hex">{duration(stretch.runt_s)}</span>.
              </>
            )}
          </li>
        ))}
      </ul>
    </section>
  );
}
