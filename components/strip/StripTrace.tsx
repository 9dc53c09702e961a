"use client";

import { type KeyboardEvent, useEffect, useRef, useState } from "react";
import type uPlot from "uplot";
import "uplot/dist/uPlot.min.css";
import { Button } from "@/components/ui/Button";
import type { Capture } from "@/lib/view/capture";
import { duration, instant, span as spanWords, timeDigits } from "@/lib/view/format";
import { type Bounds, endOf, fitted, panned, type TimeScale, zoomed } from "@/lib/view/scale";
import { nearestEdge } from "@/lib/view/strip";
import { useInk } from "./ink";
import { hasLog, type Live, makePlot, type StripTraceProps, show } from "./plot";

/** The same for those without keys and wheel. */
const STEPS = [
  ["+", "nearer"],
  ["-", "farther"],
  ["0", "whole"],
] as const;

/** What a key does to the scale, or null. */
function keyed(key: string, scale: TimeScale, bounds: Bounds): TimeScale | null {
  const middle = scale.width / 2;
  switch (key) {
    case "ArrowRight":
      return panned(scale, scale.width / 5, bounds);
    case "ArrowLeft":
      return panned(scale, -scale.width / 5, bounds);
    case "+":
    case "=":
      return zoomed(scale, 1 / 1.6, middle, bounds);
    case "-":
      return zoomed(scale, 1.6, middle, bounds);
    case "0":
      return fitted(bounds, scale.width);
    default:
      return null;
  }
}

/** One continuous trace of the whole recording, as near as one wants to look. */
export function StripTrace(props: StripTraceProps) {
  const { capture, version, span, selected } = props;
  const ink = useInk();
  const host = useRef<HTMLDivElement>(null);
  const plot = useRef<uPlot | null>(null);
  const live = useRef<Live | null>(null);
  const [cursor, setCursor] = useState<number | null>(null);
  if (ink) live.current = { props, ink };
  const bounds = capture.record;
  const shown = span ?? bounds;
  const latest = useRef({ shown, bounds });
  latest.current = { shown, bounds };

  const logged = hasLog(capture);
  // The plot is made again for another capture, theme, or a log that found its place; everything else is told to it.
  // biome-ignore lint/correctness/useExhaustiveDependencies: whether there is a log decides how tall the plot is
  useEffect(() => {
    const element = host.current;
    if (!element || !ink) return;
    // The plot moves its cursor while it is being told a new span; the page learns of it a frame later.
    let frame = 0;
    const onCursor = (tick: number | null) => {
      cancelAnimationFrame(frame);
      frame = requestAnimationFrame(() => setCursor(tick));
    };
    const made = makePlot(element, Math.max(200, element.clientWidth), () => live.current as Live, onCursor);
    plot.current = made;
    const observer = new ResizeObserver(() => {
      made.setSize({ width: Math.max(200, element.clientWidth), height: made.height });
      show(made, capture, latest.current.shown);
    });
    observer.observe(element);
    show(made, capture, latest.current.shown);
    const onWheel = (event: WheelEvent) => {
      event.preventDefault();
      const { shown: now, bounds: whole } = latest.current;
      const scale = fitted(now, made.over.clientWidth);
      const sideways = event.shiftKey || Math.abs(event.deltaX) > Math.abs(event.deltaY);
      const at = event.clientX - made.over.getBoundingClientRect().left;
      const next = sideways
        ? panned(scale, event.deltaX !== 0 ? event.deltaX : event.deltaY, whole)
        : zoomed(scale, Math.exp(Math.max(-100, Math.min(100, event.deltaY)) / 200), at, whole);
      live.current?.props.onSpan({ from: next.origin, to: endOf(next) });
    };
    made.over.addEventListener("wheel", onWheel, { passive: false });
    const onClick = (event: MouseEvent) => {
      const at = event.clientX - made.over.getBoundingClientRect().left;
      live.current?.props.onSelectAt(made.posToVal(at, "x"));
    };
    made.over.addEventListener("click", onClick);
    return () => {
      cancelAnimationFrame(frame);
      observer.disconnect();
      made.destroy();
      plot.current = null;
    };
  }, [capture, ink, logged]);

  // biome-ignore lint/correctness/useExhaustiveDependencies: the capture grows in place, the version says when
  useEffect(() => {
    if (plot.current) show(plot.current, capture, { from: shown.from, to: shown.to });
  }, [capture, version, shown.from, shown.to, selected, props.spans]);

  function act(key: string): boolean {
    const next = keyed(key, fitted(shown, plot.current?.over.clientWidth ?? 800), bounds);
    if (next) props.onSpan({ from: next.origin, to: endOf(next) });
    return next !== null;
  }

  function onKey(event: KeyboardEvent) {
    if (event.ctrlKey || event.metaKey || event.altKey || !act(event.key)) return;
    event.preventDefault();
    event.stopPropagation();
  }

  return (
    <figure className="m-0">
      <div
        ref={host}
        role="application"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: the drawing takes arrow keys, plus, minus and 0
        tabIndex={0}
        onKeyDown={onKey}
        aria-label="Trace of the recording: arrow keys move, plus and minus zoom, 0 shows all"
      />
      <figcaption className="flex min-h-6 flex-wrap gap-x-6 font-sans text-small text-quiet">
        <span>
          shown <span className="tabular">{spanWords(shown.to - shown.from, capture.head.timebase)}</span>
        </span>
        {cursor !== null && (
          <Readout capture={capture} tick={cursor} reach={((shown.to - shown.from) / 800) * 12} selected={selected} />
        )}
        <span className="screen-only ml-auto flex gap-x-4">
          <span className="hidden sm:inline">wheel zooms, shift and wheel moves, drag shows a part</span>
          {STEPS.map(([step, words]) => (
            <Button key={step} look="word" className="text-small" onClick={() => act(step)}>
              {words}
            </Button>
          ))}
        </span>
      </figcaption>
    </figure>
  );
}

function Readout({ capture, tick, reach, selected }: { capture: Capture; tick: number; reach: number; selected: number | null }) {
  const { timebase, sampleTicks } = capture.head;
  const digits = Math.max(6, timeDigits(timebase, sampleTicks));
  const edge = nearestEdge(capture.edges, tick, reach);
  const at = edge >= 0 ? capture.edges.tick(edge) : tick;
  const from = selected !== null && selected < capture.ledger.length ? capture.ledger.startTick(selected) : null;
  return (
    <>
      <span>
        {edge >= 0 ? "edge at" : "at"} <span className="tabular text-ink">{instant(at, timebase, digits)}</span>
      </span>
      {from !== null && timebase.origin !== "assumed" && (
        <span>
          <span className="tabular text-ink">{duration((at - from) / timebase.ticksPerSecond)}</span> from START of {selected}
        </span>
      )}
    </>
  );
}
