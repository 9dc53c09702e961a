// In: a span of ticks and a width in pixels. Out: the time scale that every drawing is told, and the steps of its axis.
// Drawing code never converts by itself: where a tick stands on the page is decided here alone.

import type { Timebase } from "../base/time";
import { axisTime } from "./format";

export interface TimeScale {
  /** Tick at x = 0. May be fractional. */
  readonly origin: number;
  readonly ticksPerPixel: number;
  /** Pixels. */
  readonly width: number;
}

export interface Bounds {
  readonly from: number;
  readonly to: number;
}

export function xOf(scale: TimeScale, tick: number): number {
  return (tick - scale.origin) / scale.ticksPerPixel;
}

export function tickAt(scale: TimeScale, x: number): number {
  return scale.origin + x * scale.ticksPerPixel;
}

export function endOf(scale: TimeScale): number {
  return tickAt(scale, scale.width);
}

/** The scale that shows exactly `bounds`; an empty span gets one tick so that nothing divides by zero. */
export function fitted(bounds: Bounds, width: number): TimeScale {
  const span = Math.max(1, bounds.to - bounds.from);
  return { origin: bounds.from, ticksPerPixel: span / Math.max(1, width), width: Math.max(1, width) };
}

/** Nearest one may look: a fiftieth of a tick per pixel, so that one tick is 50 pixels wide. */
const NEAREST = 1 / 50;

/** Keeps a scale inside the record: not wider than it, not past its ends. */
export function kept(scale: TimeScale, bounds: Bounds): TimeScale {
  const widest = Math.max(1, bounds.to - bounds.from) / scale.width;
  const ticksPerPixel = Math.min(widest, Math.max(NEAREST, scale.ticksPerPixel));
  const latest = bounds.to - ticksPerPixel * scale.width;
  const origin = Math.max(bounds.from, Math.min(latest, scale.origin));
  return { origin, ticksPerPixel, width: scale.width };
}

/** Zooms about the pixel `at`, which keeps its tick. A factor below 1 looks nearer. */
export function zoomed(scale: TimeScale, factor: number, at: number, bounds: Bounds): TimeScale {
  const anchor = tickAt(scale, at);
  const ticksPerPixel = Math.max(NEAREST, scale.ticksPerPixel * factor);
  const next = kept({ ...scale, ticksPerPixel }, bounds);
  return kept({ ...next, origin: anchor - at * next.ticksPerPixel }, bounds);
}

export function panned(scale: TimeScale, pixels: number, bounds: Bounds): TimeScale {
  return kept({ ...scale, origin: scale.origin + pixels * scale.ticksPerPixel }, bounds);
}

/** 1, 2 or 5 times a power of ten, the smallest that is at least `least`. */
export function roundStep(least: number): number {
  const power = 10 ** Math.floor(Math.log10(least));
  for (const factor of [1, 2, 5]) if (factor * power >= least * (1 - 1e-9)) return factor * power;
  return 10 * power;
}

export interface AxisMark {
  readonly x: number;
  readonly text: string;
}

/** Labelled places of a time axis, at least `gap` pixels apart, on round times of the capture's own axis. */
export function axisMarks(scale: TimeScale, base: Timebase, gap: number): AxisMark[] {
  const step = roundStep((gap * scale.ticksPerPixel) / base.ticksPerSecond);
  const first = Math.ceil(scale.origin / base.ticksPerSecond / step - 1e-9);
  const last = Math.floor(endOf(scale) / base.ticksPerSecond / step + 1e-9);
  const marks: AxisMark[] = [];
  for (let k = first; k <= last; k++) {
    marks.push({ x: xOf(scale, k * step * base.ticksPerSecond), text: axisTime(k * step, step, base) });
  }
  return marks;
}

/** A round length for a scale bar near `pixels` wide. */
export function scaleBar(
  ticksPerPixel: number,
  base: Timebase,
  pixels: number,
): { readonly width: number; readonly seconds: number } {
  const length = roundStep((pixels * ticksPerPixel) / base.ticksPerSecond / 2);
  return { width: (length * base.ticksPerSecond) / ticksPerPixel, seconds: length };
}
