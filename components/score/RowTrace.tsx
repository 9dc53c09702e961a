import { memo } from "react";
import { bracePath, braceShown, linePath, type PathFrame } from "@/lib/view/path";
import type { Dimension, Hatch, Letter, RowScene } from "@/lib/view/row";

// Heights inside a row of the stack, pixels.
export const TRACE_HEIGHT = 92;
const SCL_HIGH = 25;
const SCL_LOW = 39;
const SDA_HIGH = 46;
const SDA_LOW = 61;
const TICK_TOP = 65;
const BRACE_TOP = 65;
const BRACE_DEPTH = 7;
const LETTER_LINE = 77;
const VALUE_LINE = 86;
/** Where START stands. */
export const LEAD = 14;

export interface RowTraceProps {
  scene: RowScene;
  /** Ticks per pixel, pixels scrolled to the right, width in pixels. */
  ticksPerPixel: number;
  shift: number;
  width: number;
}

const TONES: Record<Letter["kind"], string> = {
  ack: "fill-quiet",
  nack: "fill-broken",
  "expected-nack": "fill-quiet",
  condition: "fill-ink",
};

function HatchColumn({ hatch, frame }: { hatch: Hatch; frame: PathFrame }) {
  const x = hatch.from * frame.scale + frame.shift;
  const width = Math.max(3, (hatch.to - hatch.from) * frame.scale);
  return <rect x={x} y={0} width={width} height={TRACE_HEIGHT} fill="url(#contest-hatch)" />;
}

interface Placed {
  readonly dimension: Dimension;
  readonly lane: number;
  readonly left: number;
  readonly right: number;
  readonly anchor: "start" | "end";
  readonly textX: number;
}

/** About the advance of the 11 px monospaced face. */
const ADVANCE = 6.7;
const LANES = [7, 18];

/** Puts each dimension into the first lane where its text does not lie over another's; one that fits nowhere is left out. */
function place(dimensions: readonly Dimension[], frame: PathFrame, width: number): Placed[] {
  const taken: { lane: number; from: number; to: number }[] = [];
  const placed: Placed[] = [];
  for (const dimension of dimensions) {
    const left = dimension.from * frame.scale + frame.shift;
    const right = dimension.to * frame.scale + frame.shift;
    const text = dimension.text.length * ADVANCE;
    // Arrows that point inwards from outside need their own room.
    const gap = right - left >= 12 ? 6 : 13;
    const anchor = right + gap + text <= width || left - gap - text < 0 ? "start" : "end";
    const textX = anchor === "start" ? right + gap : left - gap;
    const [from, to] = anchor === "start" ? [left - 8, textX + text] : [textX - text, right + 8];
    const lane = LANES.findIndex((_, number) =>
      taken.every((other) => other.lane !== number || to < other.from || from > other.to),
    );
    if (lane < 0 || right < 0 || left > width) continue;
    taken.push({ lane, from, to });
    placed.push({ dimension, lane, left, right, anchor, textX });
  }
  return placed;
}

function DimensionLine({ placed }: { placed: Placed }) {
  const { dimension, left, right, anchor, textX } = placed;
  const y = LANES[placed.lane];
  const foot = dimension.line === "scl" ? SCL_HIGH - 2 : SDA_HIGH - 2;
  const tone = dimension.kind === "limit" ? "text-broken" : "text-accent";
  const wide = right - left >= 12;
  // Arrows stand inside where there is room, else they point at the extension lines from outside, as on a drawing.
  const arrows = wide
    ? `M${left} ${y}H${right}M${left + 5} ${y - 3}L${left} ${y}L${left + 5} ${y + 3}M${right - 5} ${y - 3}L${right} ${y}L${right - 5} ${y + 3}`
    : `M${left - 8} ${y}H${left}M${left - 4} ${y - 3}L${left} ${y}L${left - 4} ${y + 3}M${right + 5} ${y}H${right}M${right + 4} ${y - 3}L${right} ${y}L${right + 4} ${y + 3}`;
  return (
    <g className={tone}>
      <path
        d={`M${left} ${y - 4}V${foot}M${right} ${y - 4}V${foot}${arrows}`}
        fill="none"
        stroke="currentColor"
        strokeWidth="1"
      />
      <text
        x={textX}
        y={y + 4}
        textAnchor={anchor}
        className="fill-current stroke-paper font-mono text-[11px] [paint-order:stroke] [stroke-width:4px]"
      >
        {dimension.text}
      </text>
    </g>
  );
}

/** Bit ticks, braces with their values, and the letters of the score. */
function Score({ scene, frame, width }: { scene: RowScene; frame: PathFrame; width: number }) {
  const inside = (from: number, to: number) => to * frame.scale + frame.shift >= 0 && from * frame.scale + frame.shift <= width;
  const pulse = scene.pulses[0];
  const bitWidth = pulse ? ((scene.pulses.at(-1)?.rise ?? pulse.rise) - pulse.rise) / Math.max(1, scene.pulses.length - 1) : 0;
  const ticksShown = bitWidth * frame.scale >= 4;
  const lettersShown = bitWidth * frame.scale >= 5;
  const ticks = ticksShown
    ? scene.pulses
        .filter((entry) => inside(entry.rise, entry.rise))
        .map((entry) => `M${(entry.rise * frame.scale + frame.shift).toFixed(1)} ${TICK_TOP - 2}v3`)
        .join("")
    : "";
  const braces = scene.braces.filter((brace) => inside(brace.from, brace.to) && braceShown(brace, frame.scale));
  return (
    <>
      <path
        d={`${ticks}${braces.map((brace) => bracePath(brace.from * frame.scale + frame.shift, brace.to * frame.scale + frame.shift, BRACE_TOP + 2, BRACE_DEPTH)).join("")}`}
        fill="none"
        className="stroke-field"
        strokeWidth="1"
      />
      {braces.map((brace) => (
        <text
          key={brace.from}
          x={((brace.from + brace.to) / 2) * frame.scale + frame.shift}
          y={VALUE_LINE}
          textAnchor="middle"
          className={`font-mono text-[12.5px] ${brace.broken ? "fill-broken" : "fill-ink"}`}
        >
          {brace.text}
        </text>
      ))}
      {scene.letters
        .filter(
          (letter) => inside(letter.at, letter.at) && (lettersShown || letter.kind === "condition" || letter.kind === "nack"),
        )
        .map((letter) => (
          <text
            key={`${letter.text}${letter.at}`}
            x={letter.at * frame.scale + frame.shift}
            y={letter.kind === "condition" ? LETTER_LINE + 1 : LETTER_LINE}
            textAnchor="middle"
            className={`${letter.kind === "condition" ? "condition text-[15px]" : "font-mono text-[11px]"} ${TONES[letter.kind]} ${letter.kind === "nack" ? "font-semibold" : ""}`}
          >
            {letter.text}
          </text>
        ))}
    </>
  );
}

/** One transaction drawn from its own edges: SCL thin above SDA heavy, the score under them. */
export const RowTrace = memo(function RowTrace({ scene, ticksPerPixel, shift, width }: RowTraceProps) {
  const scale = 1 / ticksPerPixel;
  const tail = scene.span * scale + LEAD - shift + 12;
  const base = { scale, shift: LEAD - shift, left: Math.max(0, LEAD - shift - 12), right: Math.min(width, Math.max(0, tail)) };
  const scl = linePath(scene.scl, { ...base, high: SCL_HIGH, low: SCL_LOW });
  const sda = linePath(scene.sda, { ...base, high: SDA_HIGH, low: SDA_LOW });
  const frame: PathFrame = { ...base, high: 0, low: 0 };
  return (
    <svg
      width={width}
      height={TRACE_HEIGHT}
      viewBox={`0 0 ${width} ${TRACE_HEIGHT}`}
      aria-hidden="true"
      className="block overflow-hidden"
    >
      {scene.hatches.map((hatch) => (
        <HatchColumn key={hatch.side} hatch={hatch} frame={frame} />
      ))}
      <path
        d={scl.path}
        fill="none"
        className="stroke-ink"
        strokeWidth="1"
        strokeLinejoin="miter"
        shapeRendering="geometricPrecision"
      />
      <path
        d={sda.path}
        fill="none"
        className="stroke-ink"
        strokeWidth="2"
        strokeLinejoin="miter"
        shapeRendering="geometricPrecision"
      />
      <path d={scl.unknown + sda.unknown} fill="none" className="stroke-field" strokeWidth="1" strokeDasharray="2 3" />
      <Score scene={scene} frame={frame} width={width} />
      {place(scene.dimensions, frame, width).map((placed) => (
        <DimensionLine key={`${placed.dimension.text}${placed.dimension.from}`} placed={placed} />
      ))}
      {tail > width + 12 && (
        <path d={`M${width - 9} ${SDA_LOW - 12}l5 4l-5 4`} fill="none" className="stroke-quiet" strokeWidth="1.4">
          <title>continues</title>
        </path>
      )}
    </svg>
  );
});
