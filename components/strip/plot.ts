import uPlot from "uplot";
import type { Capture } from "@/lib/view/capture";
import { axisTime, volts } from "@/lib/view/format";
import { type Bounds, endOf, fitted, roundStep, type TimeScale } from "@/lib/view/scale";
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
}

const GUTTER = 56;
const LANE = 30;
const PITCH = 46;
const SCORE = 34;
const ANALOG = 130;
const AXIS = 34;

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

/** The plot draws axis, cursor and levels; the lanes are painted into it from the edges themselves. */
export function makePlot(host: HTMLElement, width: number, live: () => Live, onCursor: (tick: number | null) => void): uPlot {
  const { capture } = live().props;
  const { ink } = live();
  const { lanes, score, digital } = place(lanesOf(capture));
  const analog = capture.head.levels === "volts" && capture.head.vdd_v !== null;
  const height = digital + (analog ? ANALOG : 0) + AXIS;
  const vdd = capture.head.vdd_v ?? 1;
  const [bottom, top] = [-0.08 * vdd, 1.12 * vdd];
  const share = analog ? ANALOG / (digital + ANALOG) : 1;
  const scaleNow = (plot: uPlot): TimeScale => {
    const { min = 0, max = 1 } = plot.scales.x;
    return fitted({ from: min, to: max }, plot.over.clientWidth);
  };
  const stroke = () => live().ink.quiet;
  const font = `12px ${ink.mono}`;
  return new uPlot(
    {
      width,
      height,
      legend: { show: false },
      cursor: { y: false, drag: { x: true, y: false, setScale: false }, points: { show: false } },
      scales: {
        x: { time: false, auto: false, range: (_, min, max) => [min, max] },
        v: { auto: false, range: () => [bottom, bottom + (top - bottom) / share] },
      },
      axes: [
        {
          scale: "x",
          stroke,
          font,
          size: AXIS,
          grid: { show: false },
          ticks: { stroke, width: 1, size: 5 },
          splits: (plot) => splits(scaleNow(plot), live().props.capture),
          values: (plot, values) => {
            const base = live().props.capture.head.timebase;
            const step = stepOf(scaleNow(plot), base.ticksPerSecond);
            return values.map((value) => axisTime(value / base.ticksPerSecond, step, base));
          },
        },
        {
          scale: "v",
          show: true,
          stroke,
          font,
          size: GUTTER,
          grid: { show: false },
          ticks: { show: false },
          splits: () => (analog ? [0, vdd / 2, vdd] : []),
          values: (_, values) => values.map((value) => volts(value)),
        },
      ],
      series: [
        {},
        { scale: "v", stroke: () => live().ink.ink, width: 1, points: { show: false }, spanGaps: false },
        { scale: "v", stroke: () => live().ink.ink, width: 2, points: { show: false }, spanGaps: false },
      ],
      hooks: {
        draw: [(plot) => drawLanes(plot, { lanes, score, digital, analog, share, bottom, top }, live(), scaleNow(plot))],
        setCursor: [
          (plot) =>
            onCursor(plot.cursor.left === undefined || plot.cursor.left < 0 ? null : plot.posToVal(plot.cursor.left, "x")),
        ],
        setSelect: [
          (plot) => {
            const { left, width: wide } = plot.select;
            if (wide > 5) live().props.onSpan({ from: plot.posToVal(left, "x"), to: plot.posToVal(left + wide, "x") });
            plot.setSelect({ left: 0, top: 0, width: 0, height: 0 }, false);
          },
        ],
      },
    },
    [
      [0, 1],
      [null, null],
      [null, null],
    ],
    host,
  );
}

function stepOf(scale: TimeScale, perSecond: number): number {
  return roundStep((150 * scale.ticksPerPixel) / perSecond);
}

function splits(scale: TimeScale, capture: Capture): number[] {
  const perSecond = capture.head.timebase.ticksPerSecond;
  const step = stepOf(scale, perSecond);
  const list: number[] = [];
  const last = Math.floor(endOf(scale) / perSecond / step + 1e-9);
  for (let k = Math.ceil(scale.origin / perSecond / step - 1e-9); k <= last; k++) list.push(k * step * perSecond);
  return list;
}

interface Drawn {
  readonly lanes: readonly Lane[];
  readonly score: number;
  readonly digital: number;
  readonly analog: boolean;
  readonly share: number;
  readonly bottom: number;
  readonly top: number;
}

function drawLanes(plot: uPlot, drawn: Drawn, { props, ink }: Live, scale: TimeScale): void {
  const context = plot.ctx;
  const ratio = uPlot.pxRatio;
  context.save();
  context.scale(ratio, ratio);
  context.translate(plot.bbox.left / ratio, plot.bbox.top / ratio);
  context.fillStyle = ink.quiet;
  context.font = `12px ${ink.sans}`;
  context.textAlign = "right";
  for (const lane of drawn.lanes) context.fillText(lane.label, -8, (lane.high + lane.low) / 2 + 4);
  context.beginPath();
  context.rect(0, 0, scale.width, plot.bbox.height / ratio);
  context.clip();
  paintLanes(context, drawn.lanes, scale, props.capture.record, ink);
  paintScore(context, props.capture, scale, drawn.score, ink);
  paintMarks(context, props.capture, scale, props.selected, drawn.digital - 4, ink);
  if (drawn.analog) paintThresholds(context, plot, props.capture, scale, ink);
  context.restore();
}

/** VIL and VIH as hairlines across the levels. */
function paintThresholds(context: CanvasRenderingContext2D, plot: uPlot, capture: Capture, scale: TimeScale, ink: Ink): void {
  context.strokeStyle = ink.hairline;
  context.lineWidth = 1;
  context.setLineDash([6, 4]);
  context.font = `11px ${ink.sans}`;
  context.fillStyle = ink.quiet;
  context.textAlign = "left";
  for (const [level, label] of [
    [capture.head.vil_v, "VIL"],
    [capture.head.vih_v, "VIH"],
  ] as const) {
    if (level === null) continue;
    const y = Math.round(plot.valToPos(level, "v")) + 0.5;
    context.beginPath();
    context.moveTo(26, y);
    context.lineTo(scale.width, y);
    context.stroke();
    context.fillText(label, 2, y + 4);
  }
  context.setLineDash([]);
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
