"use client";

import type { RefObject } from "react";
import { ContestPart } from "@/components/margin/ContestPart";
import { FindingPart } from "@/components/margin/FindingPart";
import { Notes } from "@/components/margin/Notes";
import { TagsPart } from "@/components/margin/TagsPart";
import { TransactionPart } from "@/components/margin/TransactionPart";
import type { Capture } from "@/lib/view/capture";
import type { BenchCase, Span } from "./annotations";
import { BusPart } from "./BusPart";

export interface MarginColumnProps {
  capture: Capture;
  of: BenchCase;
  selected: number | null;
  names: ReadonlyMap<number, string>;
  /** The stretch that the strip shows, while it is the open reading. */
  span: Span | null;
  onGo: (transaction: number) => void;
  onSpan: (span: Span) => void;
  onTag: (kind: string) => void;
  onAddress: (address: number) => void;
  noteField: RefObject<HTMLTextAreaElement | null>;
}

/** What stands beside the trace: the contest and its evidence, the selected transaction, tags, notes, finding. */
export function MarginColumn({
  capture,
  of,
  selected,
  span,
  names,
  onGo,
  onSpan,
  onTag,
  onAddress,
  noteField,
}: MarginColumnProps) {
  const { summary, marks, ledger } = capture;
  const index = selected !== null && selected < ledger.length ? selected : null;
  const own = index === null ? null : marks.of(index);
  const contest = own?.contest ?? (own && own.retryOf !== null ? marks.of(own.retryOf).contest : null);
  const device = index === null ? null : (names.get(ledger.row(index).address) ?? null);
  return (
    <div className="space-y-6">
      {summary && contest && <ContestPart contest={contest} summary={summary} onGo={onGo} />}
      {index !== null && <TransactionPart capture={capture} index={index} device={device} />}
      <TagsPart of={of} selected={index} span={span} onTag={onTag} />
      <Notes of={of} selected={index} span={span} base={capture.head.timebase} onGo={onGo} onSpan={onSpan} field={noteField} />
      <FindingPart of={of} onGo={onGo} />
      {index === null && <BusPart capture={capture} version={summary} names={names} onAddress={onAddress} />}
    </div>
  );
}
