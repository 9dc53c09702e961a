import { memo, useMemo } from "react";
import { RowTrace } from "@/components/score/RowTrace";
import { TagShape } from "@/components/ui/Icon";
import type { Capture } from "@/lib/view/capture";
import { address, addressBytes, count, instant } from "@/lib/view/format";
import type { Marks } from "@/lib/view/marks";
import { rowScene } from "@/lib/view/row";
import { rowSentence, type Tone, verdicts } from "@/lib/view/words";

export const TONE_CLASS: Record<Tone, string> = {
  plain: "text-ink",
  broken: "text-broken",
  contest: "text-contest",
  accent: "text-accent",
};

export interface RowLayout {
  /** Pixels of the drawn trace. */
  readonly traceWidth: number;
  readonly rowHeight: number;
  /** Words above the trace instead of beside it. */
  readonly narrow: boolean;
}

export interface StackRowProps {
  capture: Capture;
  /** The capture's marks; a row is complete when it first appears, only these change it later. */
  marks: Marks;
  index: number;
  place: number;
  total: number;
  selected: boolean;
  layout: RowLayout;
  ticksPerPixel: number;
  shift: number;
  digits: number;
  device: string | null;
  notes: readonly number[];
  tags: readonly string[];
  onSelect: (index: number) => void;
}

/** Most verdict words in one row. */
const VERDICTS = 3;

/** One transaction of the stack: number, time, address, direction, trace, verdict. */
export const StackRow = memo(function StackRow(props: StackRowProps) {
  const { capture, marks, index, layout, selected, device } = props;
  const { row, scene, found, sentence } = useMemo(() => {
    const { ledger, edges, head } = capture;
    const made = ledger.row(index);
    const own = marks.of(index);
    const beaten = own.retryOf === null ? null : marks.of(own.retryOf);
    const source = { ledger, edges, ticksPerSecond: head.timebase.ticksPerSecond };
    const words = verdicts(made, own, marks);
    return {
      row: made,
      scene: rowScene(source, made, own, beaten),
      found: words,
      sentence: rowSentence(ledger, made, words, device),
    };
  }, [capture, marks, index, device]);

  const seven = address(row.address, row.addressBits);
  const number = (
    <span className={`font-serif text-[1.0625rem] leading-5 ${selected ? "font-semibold text-ink" : "text-quiet"}`}>
      {count(index)}
      {props.notes.length > 0 && (
        <sup className="ml-0.5 font-sans text-[0.6875rem] font-semibold text-accent">{props.notes.join(",")}</sup>
      )}
    </span>
  );
  const time = <span className="tabular text-hex">{instant(row.startTick, capture.head.timebase, props.digits)}</span>;
  const where = (
    <span
      className="tabular text-hex"
      title={addressBytes(row.address, row.addressBits) && `as sent: ${addressBytes(row.address, row.addressBits)}`}
    >
      {seven}
    </span>
  );
  const direction = <span className="tabular text-hex">{row.direction ?? "·"}</span>;
  const most = layout.narrow ? 1 : VERDICTS;
  const words = (
    <>
      {found.slice(0, most).map((verdict) => (
        <span key={verdict.text} className={`block ${TONE_CLASS[verdict.tone]}`}>
          {verdict.text}
        </span>
      ))}
      {found.length > most && (
        <span className={layout.narrow ? "text-quiet" : "block text-quiet"}>and {found.length - most} more</span>
      )}
      {props.tags.map((tag) => (
        <span key={tag} className="block font-sans text-small not-italic text-accent">
          <TagShape /> {tag}
        </span>
      ))}
    </>
  );
  const trace = <RowTrace scene={scene} ticksPerPixel={props.ticksPerPixel} shift={props.shift} width={layout.traceWidth} />;
  return (
    // biome-ignore lint/a11y/useKeyWithClickEvents: the list that holds the options answers the keys
    <div
      id={`transaction-${index}`}
      role="option"
      tabIndex={-1}
      aria-selected={selected}
      aria-setsize={props.total}
      aria-posinset={props.place + 1}
      aria-label={sentence}
      onClick={() => props.onSelect(index)}
      style={{ height: layout.rowHeight }}
      className={`relative cursor-default overflow-hidden border-b border-hairline ${selected ? "before:absolute before:inset-y-0 before:left-0 before:w-[3px] before:bg-accent" : ""}`}
    >
      {layout.narrow ? (
        <div className="pl-2">
          <div className="flex h-7 items-start gap-3 pt-1.5">
            {number}
            {time}
            {where}
            {direction}
            <span className="ml-auto flex min-w-0 gap-x-2 overflow-hidden whitespace-nowrap text-right font-serif text-label italic">
              {words}
            </span>
          </div>
          <div className="-mt-1.5">{trace}</div>
        </div>
      ) : (
        <div className="grid grid-cols-[3.25rem_6.9rem_6.9rem_1.5rem_1fr_8.5rem] pl-2">
          <div className="pt-1.5">{number}</div>
          <div className="pt-2">{time}</div>
          <div className="min-w-0 pt-2">
            {where}
            <span className="block truncate pr-2 font-sans text-small text-quiet">{device ?? "–"}</span>
          </div>
          <div className="pt-2">{direction}</div>
          <div className="overflow-hidden">{trace}</div>
          <div className="pt-1.5 text-right font-serif text-body italic leading-[1.15rem]">{words}</div>
        </div>
      )}
    </div>
  );
});

/** Pixels that the words beside a trace take, by the grid above with 16 px to the rem. */
export const BESIDE = (3.25 + 6.9 + 6.9 + 1.5 + 8.5) * 16 + 8;
