"use client";

import { useEffect, useRef } from "react";
import uPlot from "uplot";
import "uplot/dist/uPlot.min.css";
import { type Ink, useInk } from "@/components/strip/ink";
import { duration } from "@/lib/diagnosis/format";
import type { Measurement } from "@/lib/diagnosis/report";

const HEIGHT = 150;
/** Steps of the distribution: eight to the octave. */
const STEP = 2 ** (1 / 8);

/** How often each length came, both axes logarithmic, with the limits as dimension lines. */
export function Distribution({ row }: { row: Measurement }) {
  const host = useRef<HTMLDivElement>(null);
  const ink = useInk();
  useEffect(() => {
    const element = host.current;
    if (!element || !ink) return;
    let plot = draw(element, row, ink);
    const resized = new ResizeObserver(() => {
      if (plot.width === element.clientWidth) return;
      plot.destroy();
      plot = draw(element, row, ink);
    });
    resized.observe(element);
    return () => {
      resized.disconnect();
      plot.destroy();
    };
  }, [row, ink]);
  return (
    <div
      ref={host}
      role="img"
      aria-label={`How often each length of ${row.parameter} came, against its limit`}
      className="screen-only min-w-0"
      style={{ height: HEIGHT }}
    />
  );
}

function draw(host: HTMLElement, row: Measurement, ink: Ink): uPlot {
  const bars = (row.distribution ?? []).filter(([from]) => from > 0);
  const limits = [row.limit_min_s, row.limit_max_s].filter((limit): limit is number => limit !== null && limit > 0);
  const known = [...bars.map(([from]) => from), ...bars.map(([from]) => from * STEP), ...limits];
  const [least, most] = [Math.min(...known) / 1.15, Math.max(...known) * 1.15];
  const tallest = Math.max(1, ...bars.map(([, number]) => number));
  const options: uPlot.Options = {
    width: host.clientWidth,
    height: HEIGHT,
    legend: { show: false },
    cursor: { show: false },
    scales: { x: { time: false, distr: 3, range: [least, most] }, y: { distr: 3, range: [0.8, 0.8 * (tallest / 0.8) ** 1.4] } },
    axes: [axis(ink, 30, (value) => duration(value)), axis(ink, 56, (value) => String(value))],
    series: [{}, { stroke: ink.ink, width: 0, paths: () => null, points: { show: false } }],
    hooks: { draw: [(plot) => paint(plot, bars, row, ink)] },
  };
  return new uPlot(options, [bars.map(([from]) => from), bars.map(([, number]) => number)], host);
}

// Ticks at 1, 2 and 5 of each decade, as far as there is room.
function axis(ink: Ink, size: number, words: (value: number) => string): uPlot.Axis {
  return {
    stroke: ink.quiet,
    font: `12px ${ink.mono}`,
    size,
    grid: { show: false },
    ticks: { stroke: ink.hairline, width: 1, size: 4 },
    splits: (_plot, _axis, min, max) => {
      const list: number[] = [];
      for (let k = Math.floor(Math.log10(min)); k <= Math.log10(max); k++) list.push(10 ** k, 2 * 10 ** k, 5 * 10 ** k);
      const inside = list.filter((value) => value >= min && value <= max);
      return inside.length > 6 ? inside.filter((value) => Math.abs(Math.log10(value) % 1) < 1e-9) : inside;
    },
    values: (_plot, values) => values.map((value) => (value === null ? "" : words(value))),
  };
}

function paint(plot: uPlot, bars: readonly (readonly [number, number])[], row: Measurement, ink: Ink): void {
  const { ctx: context, bbox } = plot;
  const x = (value: number) => plot.valToPos(value, "x", true);
  const foot = bbox.top + bbox.height;
  context.save();
  for (const [from, number] of bars) {
    const middle = from * Math.sqrt(STEP);
    const broken = (row.limit_min_s ?? 0) > middle || (row.limit_max_s ?? Number.POSITIVE_INFINITY) < middle;
    context.fillStyle = broken ? ink.broken : ink.field;
    const top = plot.valToPos(number, "y", true);
    const left = Math.round(x(from)) + 1;
    context.fillRect(left, top, Math.max(2, Math.round(x(from * STEP)) - left - 1), foot - top);
  }
  context.strokeStyle = ink.accent;
  context.fillStyle = ink.accent;
  context.lineWidth = 1.3 * uPlot.pxRatio;
  context.font = `${12 * uPlot.pxRatio}px ${ink.sans}`;
  for (const [limit, side] of [
    [row.limit_min_s, 1],
    [row.limit_max_s, -1],
  ] as const) {
    if (limit === null || limit <= 0) continue;
    const at = x(limit);
    const arm = 8 * side * uPlot.pxRatio;
    context.beginPath();
    context.moveTo(at + arm, bbox.top + 2);
    context.lineTo(at, bbox.top + 2);
    context.lineTo(at, foot);
    context.stroke();
    context.textAlign = side > 0 ? "left" : "right";
    context.fillText(`${side > 0 ? "at least" : "at most"} ${duration(limit)}`, at + arm * 1.4, bbox.top + 12 * uPlot.pxRatio);
  }
  context.restore();
}
