import uPlot from "uplot";
import type { Capture } from "@/lib/view/capture";
import { axisTime, volts } from "@/lib/view/format";
import { type Bounds, endOf, fitted, roundStep, type TimeScale } from "@/lib/view/scale";
import { paintLog, paintSpans, type Span } from "./beside";
import type { Ink } from "./ink";
import { levelData } from "./levels";
import { type Lane, paintLanes, paintMarks, paintScore } from "./paint";

// The plot of the strip: axis, cursor and voltage lanes are the chart library's, edges and score are painted into it.

export interface StripTraceProps {
  capture: Capture;
  version: unknown;
  span: Bounds | null;
  onSpan: (span: Bounds) => void;
  selected: number | null;
  onSelectAt: (tick: number) => void;
  /** Notes and tags on stretches of the record. */
  spans: readonly Span[];
}

const GUTTER = 56;
const LANE = 30;
const PITCH = 46;
const SCORE = 34;
/** Height of one voltage lane, and the space above it. */
const ANALOG = 84;
const ANALOG_GAP = 14;
const AXIS = 34;
/** Height of the lane of a controller log. */
const LOG = 26;

function lanesOf(capture: Capture): Lane[] {
  const lanes: Lane[] = [];
  let top = 16;
  const add = (label: string, edges: Lane["edges"], line: Lane["line"], heavy: boolean) => {
    lanes.push({ label, edges, line, heavy, high: top, low: top + LANE });
    top += PITCH;
  };
  add("SCL", capture.edges, "scl", false);
  add("SDA", capture.edges, "sda", true);
  capture.head.taps.forEach((tap, index) => {
    if (tap.scl) add(`${tap.label} SCL`, capture.taps[index], "scl", false);
    if (tap.sda) add(`${tap.label} SDA`, capture.taps[index], "sda", true);
  });
  return lanes;
}

/** Score stands under SDA, before any taps. */
function place(lanes: Lane[]): { lanes: Lane[]; score: number; digital: number } {
  const score = lanes[1].low + 8;
  const moved = lanes.map((lane, number) => (number < 2 ? lane : { ...lane, high: lane.high + SCORE, low: lane.low + SCORE }));
  return { lanes: moved, score, digital: (moved.at(-1)?.low ?? 0) + (lanes.length === 2 ? SCORE + 4 : 12) };
}

export interface Live {
  readonly props: StripTraceProps;
  readonly ink: Ink;
}

/** Heights of everything in the plot, pixels from its top. */
interface Plan {
  readonly lanes: readonly Lane[];
  readonly score: number;
  readonly digital: number;
  /** Top of the lane of the controller log, or null without one. */
  readonly log: number | null;
  /** Tops of the voltage lanes of SCL and SDA; none for a digital capture. */
  readonly levels: readonly number[];
  readonly height: number;
}

function planOf(capture: Capture): Plan {
  const { lanes, score, digital: lines } = place(lanesOf(capture));
  const log = hasLog(capture) ? lines : null;
  const digital = log === null ? lines : lines + LOG;
  const analog = capture.head.levels === "volts" && capture.head.vdd_v !== null;
  const levels = analog ? [0, 1].map((lane) => digital + ANALOG_GAP + lane * (ANALOG + ANALOG_GAP)) : [];
  return { lanes, score, digital, log, levels, height: digital + levels.length * (ANALOG + ANALOG_GAP) };
}

/** Whether a controller log has found its place beside the capture, and so gets a lane. */
export function hasLog({ summary }: Capture): boolean {
  return (summary?.log?.lines.length ?? 0) > 0;
}

/** Volts shown in a voltage lane. */
function voltSpan(capture: Capture): { readonly bottom: number; readonly top: number } {
  const vdd = capture.head.vdd_v ?? 1;
  return { bottom: -0.08 * vdd, top: 1.12 * vdd };
}

/** The range of a whole plot axis that puts the lane's volts between the lane's top and its foot. */
function laneRange(plan: Plan, lane: number, capture: Capture): [number, number] {
  const { bottom, top } = voltSpan(capture);
  const above = plan.levels[lane] ?? 0;
  const perPixel = (top - bottom) / ANALOG;
  return [bottom - (plan.height - above - ANALOG) * perPixel, top + above * perPixel];
}

/** The plot draws axis, cursor and levels; the lanes are painted into it from the edges themselves. */
export function makePlot(host: HTMLElement, width: number, live: () => Live, onCursor: (tick: number | null) => void): uPlot {
  const { capture } = live().props;
  const plan = planOf(capture);
  const scaleNow = (plot: uPlot): TimeScale => {
    const { min = 0, max = 1 } = plot.scales.x;
    return fitted({ from: min, to: max }, plot.over.clientWidth);
  };
  const stroke = () => live().ink.quiet;
  const bare = { show: true, size: GUTTER, grid: { show: false }, ticks: { show: false }, splits: () => [] };
  const options: uPlot.Options = {
    width,
    height: plan.height + AXIS,
    legend: { show: false },
    padding: [0, 0, 0, 0],
    cursor: { y: false, drag: { x: true, y: false, setScale: false }, points: { show: false } },
    scales: {
      x: { time: false, auto: false, range: (_, min, max) => [min, max] },
      scl: { auto: false, range: () => laneRange(plan, 0, capture) },
      sda: { auto: false, range: () => laneRange(plan, 1, capture) },
    },
    axes: [
      {
        scale: "x",
        stroke,
        font: `12px ${live().ink.mono}`,
        size: AXIS,
        grid: { show: false },
        ticks: { stroke, width: 1, size: 5 },
        splits: (plot) => splits(scaleNow(plot), capture),
        values: (plot, values) => {
          const base = capture.head.timebase;
          const step = stepOf(scaleNow(plot), base.ticksPerSecond);
          return values.map((value) => axisTime(value / base.ticksPerSecond, step, base));
        },
      },
      { ...bare, scale: "scl" },
    ],
    series: [
      {},
      { scale: "scl", stroke: () => live().ink.ink, width: 1, points: { show: false }, spanGaps: false },
      { scale: "sda", stroke: () => live().ink.ink, width: 2, points: { show: false }, spanGaps: false },
    ],
    hooks: {
      draw: [(plot) => drawLanes(plot, plan, live(), scaleNow(plot))],
      setCursor: [(plot) => onCursor((plot.cursor.left ?? -1) < 0 ? null : plot.posToVal(plot.cursor.left ?? 0, "x"))],
      setSelect: [
        (plot) => {
          const { left, width: wide } = plot.select;
          if (wide > 5) live().props.onSpan({ from: plot.posToVal(left, "x"), to: plot.posToVal(left + wide, "x") });
          plot.setSelect({ left: 0, top: 0, width: 0, height: 0 }, false);
        },
      ],
    },
  };
  const nothing: uPlot.AlignedData = [
    [0, 1],
    [null, null],
    [null, null],
  ];
  return new uPlot(options, nothing, host);
}

function stepOf(scale: TimeScale, perSecond: number): number {
  return roundStep((150 * scale.ticksPerPixel) / perSecond);
}

function splits(scale: TimeScale, capture: Capture): number[] {
  const perSecond = capture.head.timebase.ticksPerSecond;
  const step = stepOf(scale, perSecond);
  const list: number[] = [];
  // A label centred on the very edge would be cut off.
  const room = 40 * scale.ticksPerPixel;
  const last = Math.floor((endOf(scale) - room) / perSecond / step + 1e-9);
  for (let k = Math.ceil(scale.origin / perSecond / step - 1e-9); k <= last; k++) list.push(k * step * perSecond);
  return list;
}

function drawLanes(plot: uPlot, plan: Plan, { props, ink }: Live, scale: TimeScale): void {
  const context = plot.ctx;
  const ratio = uPlot.pxRatio;
  context.save();
  context.scale(ratio, ratio);
  context.translate(plot.bbox.left / ratio, plot.bbox.top / ratio);
  context.fillStyle = ink.quiet;
  context.font = `12px ${ink.sans}`;
  context.textAlign = "right";
  for (const lane of plan.lanes) context.fillText(lane.label, -8, (lane.high + lane.low) / 2 + 4);
  plan.levels.forEach((top, lane) => {
    paintLevels(context, props.capture, top, scale, ink);
    context.fillText(lane === 0 ? "SCL" : "SDA", -8, top + 10);
  });
  if (plan.log !== null) {
    context.fillStyle = ink.quiet;
    context.textAlign = "right";
    context.fillText("log", -8, plan.log + 12);
  }
  context.beginPath();
  context.rect(0, 0, scale.width, plot.bbox.height / ratio);
  context.clip();
  paintLanes(context, plan.lanes, scale, props.capture.record, ink);
  paintScore(context, props.capture, scale, plan.score, ink);
  const { log } = props.capture.summary ?? {};
  if (log && plan.log !== null) paintLog(context, log, scale, props.capture.head.timebase.ticksPerSecond, plan.log, ink);
  paintSpans(context, props.spans, scale, ink);
  paintMarks(context, props.capture, scale, props.selected, plan.digital - 4, ink);
  context.restore();
}

/** 0 V, VIL, VIH and VDD as faint lines across one voltage lane, named in the gutter. */
function paintLevels(context: CanvasRenderingContext2D, capture: Capture, laneTop: number, scale: TimeScale, ink: Ink): void {
  const { bottom, top } = voltSpan(capture);
  const { vil_v, vih_v, vdd_v } = capture.head;
  context.strokeStyle = ink.hairline;
  context.lineWidth = 1;
  context.textAlign = "right";
  for (const [level, dashed] of [
    [0, false],
    [vil_v, true],
    [vih_v, true],
    [vdd_v, false],
  ] as const) {
    if (level === null) continue;
    const y = Math.round(laneTop + ((top - level) / (top - bottom)) * ANALOG) + 0.5;
    context.setLineDash(dashed ? [6, 4] : []);
    context.beginPath();
    context.moveTo(0, y);
    context.lineTo(scale.width, y);
    context.stroke();
    context.font = `11px ${ink.mono}`;
    context.fillText(level === vdd_v ? "" : volts(level), -8, y + 4);
  }
  context.setLineDash([]);
  context.font = `12px ${ink.sans}`;
}

export function show(plot: uPlot, capture: Capture, shown: Bounds): void {
  const scale = fitted(shown, plot.over.clientWidth);
  const analog = capture.head.levels === "volts" && capture.head.vdd_v !== null;
  const data = analog ? levelData(capture, scale) : { x: [], scl: [], sda: [] };
  plot.batch(() => {
    plot.setData(
      data.x.length > 0
        ? [data.x, data.scl, data.sda]
        : [
            [shown.from, shown.to],
            [null, null],
            [null, null],
          ],
      false,
    );
    plot.setScale("x", { min: shown.from, max: shown.to });
  });
  plot.redraw(false, true);
}
