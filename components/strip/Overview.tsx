"use client";

import { type KeyboardEvent, type PointerEvent, useEffect, useMemo, useRef, useState } from "react";
import type { Capture } from "@/lib/view/capture";
import { count } from "@/lib/view/format";
import { transactionNear } from "@/lib/view/hit";
import { markAt, type OverviewScene, overviewScene } from "@/lib/view/overview";
import { type Bounds, tickAt, xOf } from "@/lib/view/scale";
import { type Ink, useInk } from "./ink";

export interface OverviewProps {
  capture: Capture;
  version: unknown;
  /** What is shown below: the strip's span, or the rows of the stack in view; bracketed. */
  window: Bounds | null;
  selected: number | null;
  onSelect: (transaction: number) => void;
  /** A span was drawn over with the pointer. */
  onSpan: (span: Bounds) => void;
  tagged: readonly number[];
  noted: readonly number[];
  spans: readonly { readonly kind: "tag" | "note"; readonly from: number }[];
}

const HEIGHT = 46;
const BASE = 38;
const MARK_LINE = 9;

function drawMark(context: CanvasRenderingContext2D, kind: string, x: number, ink: Ink): void {
  context.beginPath();
  context.lineWidth = 1.3;
  if (kind === "contest") {
    context.strokeStyle = ink.contest;
    context.moveTo(x, MARK_LINE - 5);
    context.lineTo(x + 5, MARK_LINE + 4);
    context.lineTo(x - 5, MARK_LINE + 4);
    context.closePath();
  } else if (kind === "fault") {
    context.strokeStyle = ink.broken;
    context.moveTo(x - 4.5, MARK_LINE);
    context.lineTo(x + 4.5, MARK_LINE);
    context.moveTo(x, MARK_LINE - 4.5);
    context.lineTo(x, MARK_LINE + 4.5);
  } else {
    context.strokeStyle = ink.accent;
    context.moveTo(x, MARK_LINE + 6);
    context.lineTo(x, MARK_LINE - 5);
    if (kind === "tag") {
      context.lineTo(x + 6, MARK_LINE - 2.5);
      context.lineTo(x, MARK_LINE);
    } else context.lineTo(x + 5, MARK_LINE - 5);
  }
  context.stroke();
}

function paint(canvas: HTMLCanvasElement, scene: OverviewScene, shown: Bounds | null, at: number | null, ink: Ink): void {
  const ratio = window.devicePixelRatio || 1;
  const width = scene.scale.width;
  canvas.width = Math.round(width * ratio);
  canvas.height = Math.round(HEIGHT * ratio);
  const context = canvas.getContext("2d");
  if (!context) return;
  context.scale(ratio, ratio);
  context.strokeStyle = ink.field;
  context.lineWidth = 1;
  context.beginPath();
  scene.density.forEach((share, place) => {
    if (share === 0) return;
    const x = Math.round(place * scene.pitch) + 0.5;
    context.moveTo(x, BASE);
    context.lineTo(x, BASE - 3 - share * 15);
  });
  context.stroke();
  for (const mark of scene.marks) drawMark(context, mark.kind, mark.x, ink);
  if (at !== null) {
    const x = Math.round(xOf(scene.scale, at)) + 0.5;
    context.strokeStyle = ink.accent;
    context.lineWidth = 1;
    context.beginPath();
    context.moveTo(x, BASE + 1);
    context.lineTo(x, HEIGHT);
    context.stroke();
  }
  if (!shown) return;
  const from = Math.max(1, xOf(scene.scale, shown.from));
  const to = Math.min(width - 1, Math.max(from + 6, xOf(scene.scale, shown.to)));
  context.strokeStyle = ink.accent;
  context.lineWidth = 2;
  context.beginPath();
  for (const [x, inward] of [
    [from, 5],
    [to, -5],
  ]) {
    context.moveTo(x + inward, 1);
    context.lineTo(x, 1);
    context.lineTo(x, HEIGHT - 1);
    context.lineTo(x + inward, HEIGHT - 1);
  }
  context.stroke();
}

/** The whole recording in one line: how busy the bus was, and where faults, contests, tags and notes stand. */
export function Overview(props: OverviewProps) {
  const { capture, version, tagged, noted, spans } = props;
  const ink = useInk();
  const canvas = useRef<HTMLCanvasElement>(null);
  const [width, setWidth] = useState(0);
  const [drag, setDrag] = useState<{ from: number; to: number } | null>(null);

  useEffect(() => {
    const element = canvas.current?.parentElement;
    if (!element) return;
    const observer = new ResizeObserver(() => setWidth(element.clientWidth));
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  // biome-ignore lint/correctness/useExhaustiveDependencies: the capture grows in place, the version says when
  const scene = useMemo(() => {
    const { edges, ledger, summary, record, head } = capture;
    return overviewScene(
      { edges, ledger, summary, record, tagged, noted, spans, ticksPerSecond: head.timebase.ticksPerSecond },
      Math.max(1, width),
    );
  }, [capture, version, tagged, noted, spans, width]);

  const shown = drag
    ? { from: tickAt(scene.scale, Math.min(drag.from, drag.to)), to: tickAt(scene.scale, Math.max(drag.from, drag.to)) }
    : props.window;
  const at = props.selected === null || props.selected >= capture.ledger.length ? null : capture.ledger.startTick(props.selected);
  useEffect(() => {
    if (canvas.current && ink && width > 0) paint(canvas.current, scene, shown, at, ink);
  });

  const place = (event: PointerEvent) => event.clientX - (canvas.current?.getBoundingClientRect().left ?? 0);

  function up(event: PointerEvent<HTMLCanvasElement>) {
    const x = place(event);
    const from = drag?.from ?? x;
    setDrag(null);
    if (Math.abs(x - from) > 5) {
      props.onSpan({ from: tickAt(scene.scale, Math.min(x, from)), to: tickAt(scene.scale, Math.max(x, from)) });
      return;
    }
    const transaction = markAt(scene, x, 8)?.transaction ?? transactionNear(capture.ledger, tickAt(scene.scale, x));
    if (transaction !== null) props.onSelect(transaction);
  }

  function key(event: KeyboardEvent) {
    const step = event.key === "ArrowRight" ? 1 : event.key === "ArrowLeft" ? -1 : 0;
    if (step === 0) return;
    event.preventDefault();
    const from = props.selected ?? 0;
    const near = transactionNear(
      capture.ledger,
      tickAt(scene.scale, xOf(scene.scale, capture.ledger.startTick(from)) + step * 12),
    );
    const next = near === from ? Math.max(0, Math.min(capture.ledger.length - 1, from + step)) : near;
    if (next !== null) props.onSelect(next);
  }

  const faults = capture.summary?.faults.length ?? 0;
  const contests = capture.summary?.contests.length ?? 0;
  return (
    <div className="sticky top-0 z-10 border-y border-hairline bg-paper print:static">
      <canvas
        ref={canvas}
        role="slider"
        tabIndex={0}
        aria-label={`The whole recording, ${count(faults)} faults and ${count(contests)} contests; arrow keys move through it`}
        aria-valuemin={0}
        aria-valuemax={Math.max(0, capture.ledger.length - 1)}
        aria-valuenow={props.selected ?? 0}
        aria-valuetext={props.selected === null ? "nothing selected" : `transaction ${props.selected}`}
        onKeyDown={key}
        onPointerDown={(event) => {
          event.currentTarget.setPointerCapture(event.pointerId);
          setDrag({ from: place(event), to: place(event) });
        }}
        onPointerMove={(event) => drag && setDrag({ ...drag, to: place(event) })}
        onPointerUp={up}
        onPointerCancel={() => setDrag(null)}
        className="block h-[46px] w-full touch-pan-y select-none"
      />
    </div>
  );
}
