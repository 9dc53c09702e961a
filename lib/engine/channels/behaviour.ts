// In: line traces. Out: what each line does on its own and beside another, in numbers and in a few words: for telling a
// person what was found in a file that is no bus, and for recognising copies and drive taps.

import type { LineTrace } from "./trace";

/** Two traces with exactly the same changes. */
export function identical(a: LineTrace, b: LineTrace): boolean {
  if (a === b) return true;
  if (a.length !== b.length || a.initial !== b.initial) return false;
  if (a.ticks === b.ticks && a.levels === b.levels) return true;
  for (let i = 0; i < a.length; i++) if (a.ticks[i] !== b.ticks[i] || a.levels[i] !== b.levels[i]) return false;
  return true;
}

/** The same waveform a little later or earlier (a buffer, a second probe): every change by less than a quarter of the shortest pulse. */
export function buffered(a: LineTrace, b: LineTrace): boolean {
  if (a.initial !== b.initial || a.length < 4 || Math.abs(a.length - b.length) > 1) return false;
  const n = Math.min(a.length, b.length);
  let shortest = Number.POSITIVE_INFINITY;
  for (let i = 1; i < n; i++) shortest = Math.min(shortest, a.ticks[i] - a.ticks[i - 1]);
  for (let i = 0; i < n; i++) {
    if (a.levels[i] !== b.levels[i] || Math.abs(a.ticks[i] - b.ticks[i]) * 4 > shortest) return false;
  }
  return true;
}

function quantile(sorted: Float64Array, q: number): number {
  return sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))];
}

interface Widths {
  readonly high: Float64Array;
  readonly low: Float64Array;
}

/** Widths of the complete pulses, sorted. */
function widthsOf(trace: LineTrace): Widths {
  const high: number[] = [];
  const low: number[] = [];
  for (let i = 1; i < trace.length; i++) {
    const width = trace.ticks[i] - trace.ticks[i - 1];
    if (trace.levels[i - 1] === 1) high.push(width);
    else if (trace.levels[i - 1] === 0) low.push(width);
  }
  return { high: Float64Array.from(high).sort(), low: Float64Array.from(low).sort() };
}

/** Lengths of the groups of rising edges that gaps of more than three times the median period separate. */
function groupsOf(trace: LineTrace): number[] {
  const rises: number[] = [];
  for (let i = 0; i < trace.length; i++) if (trace.levels[i] === 1) rises.push(trace.ticks[i]);
  if (rises.length < 3) return [rises.length];
  const periods = Float64Array.from(rises.slice(1), (tick, i) => tick - rises[i]).sort();
  const gap = 3 * quantile(periods, 0.5);
  const groups = [1];
  for (let i = 1; i < rises.length; i++) {
    if (rises[i] - rises[i - 1] > gap) groups.push(1);
    else groups[groups.length - 1]++;
  }
  return groups;
}

const share = (part: number, whole: number) => Math.round((100 * part) / whole);

function steadyWidths({ high, low }: Widths): boolean {
  if (high.length < 3 || low.length < 3) return false;
  const period = quantile(high, 0.5) + quantile(low, 0.5);
  return quantile(high, 0.95) + quantile(low, 0.95) < 1.5 * period && quantile(high, 0.05) + quantile(low, 0.05) > 0.6 * period;
}

/** A pulse train without a pause, as of a PWM or a free-running clock. */
export function steady(trace: LineTrace): boolean {
  return trace.length >= 40 && steadyWidths(widthsOf(trace));
}

/** Whether nearly all pulse widths are whole multiples of the shortest, as in an asynchronous serial line. */
function serial(widths: Widths): boolean {
  const all = Float64Array.from([...widths.high, ...widths.low]).sort();
  if (all.length < 10) return false;
  const unit = quantile(all, 0.05);
  const fitting = all.filter((width) => Math.abs(width / unit - Math.round(width / unit)) < 0.1).length;
  const ratio = quantile(all, 0.9) / unit;
  return fitting >= 0.9 * all.length && ratio > 1.5 && ratio < 12;
}

/** A few words on what a line does: "stays high", "a steady pulse train, 30 % high". */
export function portray(trace: LineTrace): string {
  const level = trace.initial === 1 ? "high" : trace.initial === 0 ? "low" : "unknown";
  if (trace.length === 0) return `stays ${level}`;
  if (trace.length < 8) return `changes ${trace.length === 1 ? "once" : `${trace.length} times`}`;
  const widths = widthsOf(trace);
  if (widths.high.length < 3 || widths.low.length < 3) return `changes ${trace.length} times`;
  const high = quantile(widths.high, 0.5);
  const period = high + quantile(widths.low, 0.5);
  if (steadyWidths(widths)) return `is a steady pulse train, ${share(high, period)} % high, as of a PWM or a free-running clock`;
  const groups = groupsOf(trace);
  const eights = groups.filter((size) => size > 0 && size % 8 === 0).length;
  if (groups.length > 1 && 2 * eights > groups.length) return "comes in groups of 8 pulses, as an SPI clock does";
  if (serial(widths)) return "looks like an asynchronous serial line (widths are multiples of one bit time)";
  return `changes ${trace.length} times in no pattern of a two-wire bus`;
}

/** Ticks at `levelA` of a while b stands at `levelB`, and all ticks at `levelA`, over the span both cover. */
export function overlap(a: LineTrace, levelA: number, b: LineTrace, levelB: number): { both: number; all: number } {
  let i = 0;
  let j = 0;
  let la: number = a.initial;
  let lb: number = b.initial;
  let at = Number.NaN;
  let both = 0;
  let all = 0;
  const until = Math.min(a.until ?? Number.POSITIVE_INFINITY, b.until ?? Number.POSITIVE_INFINITY);
  while (i < a.length || j < b.length) {
    const ta = i < a.length ? a.ticks[i] : Number.POSITIVE_INFINITY;
    const tb = j < b.length ? b.ticks[j] : Number.POSITIVE_INFINITY;
    const next = Math.min(ta, tb);
    if (next > until) break;
    if (!Number.isNaN(at) && la === levelA) {
      all += next - at;
      if (lb === levelB) both += next - at;
    }
    if (ta === next) la = a.levels[i++];
    if (tb === next) lb = b.levels[j++];
    at = next;
  }
  return { both, all };
}

/**
 * Whether `line` can be what one device drives onto `bus`: it pulls (low, or high where `pulls` is 1) only while the bus
 * is low, and the bus is also low without it. One part in fifty is left for edges and delays.
 */
export function drives(line: LineTrace, pulls: 0 | 1, bus: LineTrace): boolean {
  if (line.length < 2) return false;
  const own = overlap(line, pulls, bus, 0);
  const others = overlap(bus, 0, line, 1 - pulls);
  return own.all > 0 && own.both >= 0.98 * own.all && others.all > 0 && others.both >= 0.02 * others.all;
}
