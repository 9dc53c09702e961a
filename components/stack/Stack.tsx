"use client";

import { useCallback, useEffect, useLayoutEffect, useMemo, useRef, useState } from "react";
import type { BenchNote, BenchTag, TagKind } from "@/components/bench/annotations";
import { unhurried } from "@/components/bench/unhurried";
import { TRACE_HEIGHT } from "@/components/score/RowTrace";
import type { Capture } from "@/lib/view/capture";
import { timeDigits } from "@/lib/view/format";
import { type Extent, moved, type Position, revealing, rowSpan, settled, trackHeight } from "@/lib/view/window";
import { BESIDE, type RowLayout, StackRow } from "./StackRow";

export interface StackProps {
  capture: Capture;
  /** Transactions to show, ascending; null for all of them. */
  rows: Uint32Array | null;
  selected: number | null;
  onSelect: (index: number) => void;
  ticksPerPixel: number;
  /** Pixels by which every trace is moved to the left. */
  shift: number;
  onTraceWidth: (width: number) => void;
  /** Zooming over a trace, factor and pixel from START. */
  onZoom: (factor: number, at: number) => void;
  onShift: (pixels: number) => void;
  /** First and last transaction in view, after the page came to rest there. */
  onView: (first: number, last: number) => void;
  names: ReadonlyMap<number, string>;
  notes: readonly BenchNote[];
  tags: readonly BenchTag[];
  tagKinds: readonly TagKind[];
}

const SPARE = 4;
const NARROW = 720;
/** The page counts as resting after so long without a move. */
const REST_MS = 60;
/** Room kept above a row that is brought into view. */
const ABOVE = 60;

function placeOf(rows: Uint32Array | null, index: number): number {
  if (!rows) return index;
  let low = 0;
  let high = rows.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (rows[middle] < index) low = middle + 1;
    else high = middle;
  }
  return low;
}

function layoutFor(width: number): RowLayout {
  const narrow = width < NARROW;
  return {
    narrow,
    traceWidth: Math.max(120, Math.floor(narrow ? width - 8 : width - BESIDE)),
    rowHeight: narrow ? TRACE_HEIGHT + 22 : TRACE_HEIGHT + 1,
  };
}

const EMPTY: readonly never[] = [];

/** The ledger whose every row is one transaction drawn from its own edges. Only the rows in view exist. */
export function Stack(props: StackProps) {
  const { capture, rows, selected, onTraceWidth } = props;
  const list = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(0);
  const [view, setView] = useState(800);
  /** Height of the list's part in the window when it first had a width: the rows that are drawn first. */
  const [fore, setFore] = useState(0);
  const [complete, setComplete] = useState(false);
  const [position, setPosition] = useState<Position>({ offset: 0, top: 0 });
  const layout = useMemo(() => layoutFor(width), [width]);
  const total = rows ? rows.length : capture.ledger.length;
  const extent: Extent = { rows: total, rowHeight: layout.rowHeight, view };
  const live = useRef({ extent, position });
  live.current = { extent, position };

  useLayoutEffect(() => {
    const element = list.current;
    if (!element) return;
    // Width and the scale that follows from it at once, so that no row is drawn twice.
    const measure = () => {
      const { clientWidth } = element;
      const below = window.innerHeight - Math.max(0, element.getBoundingClientRect().top);
      setWidth(clientWidth);
      setView(window.innerHeight);
      setFore((now) => now || Math.max(1, below));
      if (clientWidth > 0) onTraceWidth(layoutFor(clientWidth).traceWidth);
    };
    measure();
    const observer = new ResizeObserver(measure);
    observer.observe(element);
    return () => observer.disconnect();
  }, [onTraceWidth]);

  // The rows in the window at once; those below it and the spare ones once these stand.
  const begun = width > 0 && total > 0;
  useEffect(() => {
    if (begun) return unhurried(() => setComplete(true));
  }, [begun]);

  useEffect(() => {
    let idle: ReturnType<typeof setTimeout> | undefined;
    const onScroll = () => {
      const element = list.current;
      if (!element) return;
      const top = Math.max(0, Math.round(-element.getBoundingClientRect().top));
      const next = moved(live.current.extent, live.current.position, top);
      live.current.position = next;
      setPosition(next);
      clearTimeout(idle);
      // Near moves let list and track drift apart; once the page rests, the track is put where the list is.
      idle = setTimeout(() => {
        const proper = settled(live.current.extent, live.current.position.offset);
        if (Math.abs(proper.top - live.current.position.top) < live.current.extent.view) return;
        live.current.position = proper;
        setPosition(proper);
        window.scrollBy({ top: proper.top - top, behavior: "instant" });
      }, 250);
    };
    const onResize = () => setView(window.innerHeight);
    window.addEventListener("scroll", onScroll, { passive: true });
    window.addEventListener("resize", onResize);
    return () => {
      clearTimeout(idle);
      window.removeEventListener("scroll", onScroll);
      window.removeEventListener("resize", onResize);
    };
  }, []);

  // A new selection is brought into view with the least movement; the one that the address names too, as soon as it has been
  // read, and once more when the sentences that appear above at the end have moved everything.
  const shown = useRef<string | null>(null);
  const reached = selected !== null && placeOf(rows, selected) < total;
  const concluded = capture.summary !== null;
  const arrived = useRef(concluded);
  useEffect(() => {
    const element = list.current;
    const key = arrived.current ? `${selected}` : `${selected} ${concluded}`;
    if (selected === null || !reached || width === 0 || !element || key === shown.current) return;
    const place = placeOf(rows, selected);
    const { extent: now, position: from } = live.current;
    shown.current = key;
    if (concluded) arrived.current = true;
    if (arrived.current) shown.current = `${selected}`;
    const rect = element.getBoundingClientRect();
    const offset = rect.top > 0 ? -rect.top : from.offset;
    const wanted = revealing(now, offset, place, ABOVE);
    if (wanted === offset) return;
    if (wanted <= 0) {
      window.scrollBy({ top: rect.top + wanted, behavior: "instant" });
      return;
    }
    const next = settled(now, wanted);
    live.current.position = next;
    setPosition(next);
    window.scrollTo({ top: window.scrollY + rect.top + next.top, behavior: "instant" });
  }, [selected, rows, width, reached, concluded]);

  const { onSelect } = props;
  const select = useCallback(
    (index: number) => {
      shown.current = `${index}`;
      onSelect(index);
    },
    [onSelect],
  );

  const { onZoom, onShift } = props;
  useEffect(() => {
    const element = list.current;
    if (!element) return;
    const onWheel = (event: WheelEvent) => {
      if (event.ctrlKey || event.metaKey) {
        event.preventDefault();
        const trace = element.querySelector("svg")?.getBoundingClientRect();
        onZoom(Math.exp(Math.max(-60, Math.min(60, event.deltaY)) / 120), event.clientX - (trace?.left ?? 0));
      } else if (event.shiftKey || Math.abs(event.deltaX) > Math.abs(event.deltaY)) {
        event.preventDefault();
        onShift(event.deltaX !== 0 ? event.deltaX : event.deltaY);
      }
    };
    element.addEventListener("wheel", onWheel, { passive: false });
    return () => element.removeEventListener("wheel", onWheel);
  }, [onZoom, onShift]);

  const seen = rowSpan(extent, position, 0);
  const firstSeen = seen.first < seen.end ? (rows ? rows[seen.first] : seen.first) : -1;
  const lastSeen = seen.first < seen.end ? (rows ? rows[seen.end - 1] : seen.end - 1) : -1;
  const { onView } = props;
  useEffect(() => {
    if (firstSeen < 0) return;
    const timer = setTimeout(() => onView(firstSeen, lastSeen), REST_MS);
    return () => clearTimeout(timer);
  }, [firstSeen, lastSeen, onView]);

  const span = complete ? rowSpan(extent, position, SPARE) : rowSpan({ ...extent, view: fore }, position, 0);
  const digits = Math.min(7, timeDigits(capture.head.timebase, capture.head.sampleTicks));
  const drawn: number[] = [];
  for (let place = span.first; place < span.end; place++) drawn.push(place);
  return (
    <div
      ref={list}
      role="listbox"
      tabIndex={0}
      aria-label="Transactions"
      aria-activedescendant={selected === null ? undefined : `transaction-${selected}`}
      className="screen-only relative border-t border-ink"
      style={{ height: Math.max(layout.rowHeight, trackHeight(extent)) }}
    >
      <div className="absolute inset-x-0" style={{ top: span.top }}>
        {width > 0 &&
          drawn.map((place) => {
            const index = rows ? rows[place] : place;
            return (
              <StackRow
                key={index}
                capture={capture}
                marks={capture.marks}
                index={index}
                place={place}
                total={total}
                selected={index === selected}
                layout={layout}
                ticksPerPixel={props.ticksPerPixel}
                shift={props.shift}
                digits={digits}
                device={props.names.get(capture.ledger.row(index).address) ?? null}
                notes={numbersOn(props.notes, index)}
                tags={tagsOn(props.tags, props.tagKinds, index)}
                onSelect={select}
              />
            );
          })}
      </div>
    </div>
  );
}

function numbersOn(notes: readonly BenchNote[], index: number): readonly number[] {
  const found = notes.filter((note) => note.transaction === index).map((note) => note.number);
  return found.length === 0 ? EMPTY : found;
}

function tagsOn(tags: readonly BenchTag[], kinds: readonly TagKind[], index: number): readonly string[] {
  const found = tags
    .filter((tag) => tag.transaction === index)
    .map((tag) => kinds.find((kind) => kind.id === tag.kind)?.name ?? "tag");
  return found.length === 0 ? EMPTY : found;
}
