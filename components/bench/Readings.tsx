"use client";

import { type ReactNode, type RefObject, useCallback, useMemo, useState } from "react";
import { Faults } from "@/components/ledger/Faults";
import { Filters } from "@/components/ledger/Filters";
import { Limits } from "@/components/ledger/Limits";
import { ScaleBar } from "@/components/ledger/ScaleBar";
import { Search } from "@/components/ledger/Search";
import { ContestReading } from "@/components/race/ContestReading";
import { Stack } from "@/components/stack/Stack";
import { InView } from "@/components/strip/InView";
import { LogInView } from "@/components/strip/LogInView";
import { StripTrace } from "@/components/strip/StripTrace";
import { Tabs } from "@/components/ui/Tabs";
import { type Capture, usualScale } from "@/lib/view/capture";
import { SHOWS, type Show } from "@/lib/view/filter";
import { count } from "@/lib/view/format";
import { transactionNear } from "@/lib/view/hit";
import { READINGS, type Reading, type ViewState } from "@/lib/view/state";
import type { BenchCase, NamedSpan } from "./annotations";

export interface ReadingsProps {
  capture: Capture;
  version: unknown;
  state: ViewState;
  onState: (change: Partial<ViewState>) => void;
  onGo: (transaction: number) => void;
  rows: Uint32Array | null;
  of: BenchCase;
  tagged: readonly number[];
  names: ReadonlyMap<number, string>;
  searchField: RefObject<HTMLInputElement | null>;
  onView: (first: number, last: number) => void;
  /** Notes and tags on stretches of the record. */
  spans: readonly NamedSpan[];
}

const READING_WORDS: Record<Reading, string> = {
  stack: "Stack",
  strip: "Strip",
  contests: "Contests",
  limits: "Limits",
  faults: "Faults",
};

function ReadingName({ reading, capture }: { reading: Reading; capture: Capture }) {
  const faults = capture.summary?.faults.length ?? 0;
  const contests = capture.summary?.contests.length ?? 0;
  const broken = (capture.summary?.measurements ?? []).filter((row) => row.below + row.above > 0).length;
  return (
    <>
      {READING_WORDS[reading]}
      {reading === "faults" && faults > 0 && <span className="tabular ml-1.5 text-[0.75rem]">{count(faults)}</span>}
      {reading === "contests" && contests > 0 && (
        <span className="tabular ml-1.5 text-[0.75rem] text-contest">{count(contests)}</span>
      )}
      {reading === "limits" && broken > 0 && <span className="tabular ml-1.5 text-[0.75rem] text-broken">{count(broken)}</span>}
    </>
  );
}

/** The readings of one capture: the stack, the strip, the limits and the faults; the selection is shared. */
export function Readings(props: ReadingsProps) {
  const { capture, state, onState, onGo } = props;
  const { summary } = capture;
  const contents: Record<Reading, ReactNode> = {
    stack: <StackReading {...props} />,
    strip: <StripReading {...props} />,
    contests: summary && (
      <ContestReading
        capture={capture}
        names={props.names}
        selected={state.selected}
        onGo={(transaction) => {
          onGo(transaction);
          onState({ reading: "stack" });
        }}
      />
    ),
    limits: summary && <Limits summary={summary} onGo={onGo} />,
    faults: summary && <Faults summary={summary} capture={capture} onGo={onGo} />,
  };
  return (
    <Tabs
      label="Readings"
      value={contents[state.reading] ? state.reading : "stack"}
      onValueChange={(value) => onState({ reading: READINGS.find((reading) => reading === value) ?? "stack" })}
      items={READINGS.filter((reading) => contents[reading]).map((reading) => ({
        value: reading,
        text: <ReadingName reading={reading} capture={capture} />,
        content: <div className="screen-only mt-3">{contents[reading]}</div>,
      }))}
    />
  );
}

function StripReading({ capture, version, state, onState, names, spans }: ReadingsProps) {
  return (
    <>
      <StripTrace
        capture={capture}
        version={version}
        span={state.strip}
        onSpan={(strip) => onState({ strip })}
        selected={state.selected}
        onSelectAt={(tick) => {
          const near = transactionNear(capture.ledger, tick);
          if (near !== null) onState({ selected: near });
        }}
        spans={spans}
      />
      <InView
        capture={capture}
        span={state.strip ?? capture.record}
        selected={state.selected}
        names={names}
        onSelect={(selected) => onState({ selected })}
      />
      <LogInView capture={capture} span={state.strip ?? capture.record} />
    </>
  );
}

function StackReading({ capture, state, onState, rows, of, tagged, names, searchField, onView }: ReadingsProps) {
  const [traceWidth, setTraceWidth] = useState(600);
  const [shift, setShift] = useState(0);
  const concluded = capture.summary !== null;
  const begun = capture.ledger.length > 0;
  // biome-ignore lint/correctness/useExhaustiveDependencies: fitted when the first rows are there and once more when all are
  const usual = useMemo(() => usualScale(capture.ledger, traceWidth), [capture, traceWidth, concluded, begun]);
  const most = capture.ledger.longest;
  const scale = state.stackScale ?? usual;

  const zoom = useCallback(
    (factor: number, at: number) => {
      const next = Math.min(Math.max(1, most / 60), Math.max(1 / 50, scale * factor));
      setShift((now) => Math.max(0, ((now + at - 14) * scale) / next - (at - 14)));
      onState({ stackScale: next });
    },
    [scale, most, onState],
  );
  const move = useCallback(
    (pixels: number) => setShift((now) => Math.max(0, Math.min(Math.max(0, most / scale - traceWidth + 60), now + pixels))),
    [most, scale, traceWidth],
  );

  const counts: Record<Show, number> = {
    all: capture.ledger.length,
    contested: capture.marks.contested.length,
    stretched: capture.marks.stretched.length,
    "no-answer": capture.marks.unanswered.length,
    "outside-limits": capture.marks.outside.length,
    faulty: capture.marks.faulty.length,
    tagged: tagged.length,
  };
  // biome-ignore lint/correctness/useExhaustiveDependencies: the capture grows in place; while it does the list is not needed
  const addresses = useMemo(() => capture.ledger.addresses, [capture, concluded]);
  const empty = rows !== null && rows.length === 0;
  return (
    <>
      <div className="screen-only mt-2 flex flex-wrap items-baseline justify-between gap-x-8 gap-y-1.5">
        <Filters
          filter={state.filter}
          onFilter={(filter) => onState({ filter })}
          counts={counts}
          tagging={SHOWS.length > 0 && (of.addTag !== undefined || tagged.length > 0)}
        />
        <ScaleBar
          ticksPerPixel={scale}
          timebase={capture.head.timebase}
          onZoom={(factor) => zoom(factor, 14)}
          onFit={() => {
            setShift(0);
            onState({ stackScale: null });
          }}
        />
      </div>
      <div className="screen-only mb-2 mt-1.5">
        <Search
          filter={state.filter}
          onFilter={(filter) => onState({ filter })}
          addresses={addresses}
          names={names}
          input={searchField}
          remaining={rows === null ? null : rows.length}
        />
      </div>
      {empty ? (
        <p className="screen-only border-t border-ink py-6 font-serif text-body text-quiet">
          No transaction of this capture is such.
        </p>
      ) : (
        <Stack
          capture={capture}
          rows={rows}
          selected={state.selected}
          onSelect={(selected) => onState({ selected })}
          ticksPerPixel={scale}
          shift={shift}
          onTraceWidth={setTraceWidth}
          onZoom={zoom}
          onShift={move}
          onView={onView}
          names={names}
          notes={of.notes}
          tags={of.tags}
          tagKinds={of.tagKinds}
        />
      )}
    </>
  );
}

/** The strip at one transaction with a little before and after. */
export function spanAround(capture: Capture, index: number): Partial<ViewState> {
  const from = capture.ledger.startTick(index);
  const to = capture.ledger.endTick(index);
  const margin = Math.max(1, (to - from) * 0.12);
  return { reading: "strip", strip: { from: from - margin, to: to + margin }, selected: index };
}
