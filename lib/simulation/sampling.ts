// In: a recording. Out: what an instrument would have stored: levels or volts at a sample rate, or every change (a simulator's
// view), as edge blocks or as samples. Ticks are picoseconds.

import type { EdgeBlock, VoltColumns } from "../engine/samples/edges";
import { SCL, SDA } from "../engine/samples/edges";
import type { Drive, Recording } from "./bus";
import type { Random } from "./random";
import type { Segments } from "./wire";

/** How an instrument looks at the bus. */
export interface Instrument {
  /** Samples per second; null stores every change with its own time, rounded to a nanosecond. */
  readonly rate_hz: number | null;
  /** Time of the first sample, 0 to one interval. */
  readonly phase_s: number;
  /** Threshold of a one-threshold (digital) input, as a share of VDD. */
  readonly threshold: number;
}

interface Crossings {
  readonly at: number[];
  readonly level: number[];
}

const NANOSECOND = 1000;

/** Times at which the line crosses `volts`, with the level after. */
export function crossings(segments: Segments, volts: number, endPs: number): Crossings {
  const out: Crossings = { at: [], level: [] };
  const { at, v0, target, tau } = segments;
  for (let i = 0; i < at.length; i++) {
    const end = i + 1 < at.length ? at[i + 1] : endPs;
    if (end <= at[i]) continue;
    const from = v0[i] >= volts;
    const vEnd = target[i] + (v0[i] - target[i]) * Math.exp(-(end - at[i]) / tau[i]);
    const to = vEnd >= volts;
    if (from === to) continue;
    out.at.push(at[i] + tau[i] * Math.log((v0[i] - target[i]) / (volts - target[i])));
    out.level.push(to ? 1 : 0);
  }
  return out;
}

/** One-threshold capture of SCL and SDA. */
export function captureLevels(recording: Recording, instrument: Instrument): EdgeBlock {
  const volts = recording.vdd_v * instrument.threshold;
  const scl = crossings(recording.scl, volts, recording.endPs);
  const sda = crossings(recording.sda, volts, recording.endPs);
  return merge(quantise(scl, instrument), quantise(sda, instrument), instrument);
}

/** Tap of one controller: its own drive, 1 = released. */
export function captureTap(recording: Recording, controller: number, instrument: Instrument): EdgeBlock {
  const { scl, sda } = recording.drives[controller];
  return merge(quantise(ofDrive(scl), instrument), quantise(ofDrive(sda), instrument), instrument);
}

function ofDrive(drive: Drive): Crossings {
  return { at: [...drive.at], level: drive.low.map((low) => (low ? 0 : 1)) };
}

/** Moves each change to the first sample that shows it; changes that no sample shows disappear. */
function quantise(line: Crossings, instrument: Instrument): Crossings {
  const out: Crossings = { at: [], level: [] };
  const step = instrument.rate_hz === null ? NANOSECOND : 1e12 / instrument.rate_hz;
  const phase = instrument.phase_s * 1e12;
  let shown = 1;
  for (let i = 0; i < line.at.length; i++) {
    const k = Math.max(0, Math.ceil((line.at[i] - phase) / step));
    const next = i + 1 < line.at.length ? Math.max(0, Math.ceil((line.at[i + 1] - phase) / step)) : Number.POSITIVE_INFINITY;
    if (next === k || line.level[i] === shown) continue;
    shown = line.level[i];
    out.at.push(Math.round(phase + k * step));
    out.level.push(shown);
  }
  return out;
}

function merge(scl: Crossings, sda: Crossings, instrument: Instrument): EdgeBlock {
  const room = scl.at.length + sda.at.length + 1;
  const ticks = new Float64Array(room);
  const lines = new Uint8Array(room);
  ticks[0] = Math.round(instrument.phase_s * 1e12);
  lines[0] = SCL | SDA;
  let n = 1;
  let i = 0;
  let j = 0;
  let state = SCL | SDA;
  while (i < scl.at.length || j < sda.at.length) {
    const a = i < scl.at.length ? scl.at[i] : Number.POSITIVE_INFINITY;
    const b = j < sda.at.length ? sda.at[j] : Number.POSITIVE_INFINITY;
    const at = Math.min(a, b);
    if (a === at) state = scl.level[i++] === 1 ? state | SCL : state & ~SCL;
    if (b === at) state = sda.level[j++] === 1 ? state | SDA : state & ~SDA;
    if (at <= ticks[n - 1]) {
      lines[n - 1] = state;
      continue;
    }
    ticks[n] = at;
    lines[n++] = state;
  }
  return { length: n, ticks: ticks.subarray(0, n), lines: lines.subarray(0, n), volts: null };
}

/** An oscilloscope: volts with noise, rounded to a step. */
export interface Scope {
  readonly rate_hz: number;
  readonly noise_v: number;
  readonly step_v: number;
}

/** Every sample of both lines. */
export function captureVolts(recording: Recording, scope: Scope, random: Random): { scl: Float32Array; sda: Float32Array } {
  const count = Math.floor((recording.endPs / 1e12) * scope.rate_hz);
  const sample = (segments: Segments): Float32Array => {
    const out = new Float32Array(count);
    let s = 0;
    for (let k = 0; k < count; k++) {
      const t = (k * 1e12) / scope.rate_hz;
      while (s + 1 < segments.at.length && segments.at[s + 1] <= t) s++;
      const v = segments.target[s] + (segments.v0[s] - segments.target[s]) * Math.exp(-(t - segments.at[s]) / segments.tau[s]);
      const noisy = v + scope.noise_v * random.gauss();
      out[k] = scope.step_v > 0 ? Math.round(noisy / scope.step_v) * scope.step_v : noisy;
    }
    return out;
  };
  return { scl: sample(recording.scl), sda: sample(recording.sda) };
}

/**
 * What the comparator of the engine makes of a scope's samples, without making the samples: rises at 0.7 VDD, falls at 0.3,
 * crossing times with the error of interpolating between noisy samples, mean levels with the noise of their sample count.
 */
export function captureVoltEdges(recording: Recording, scope: Scope, random: Random): EdgeBlock {
  const vdd = recording.vdd_v;
  const high = [recording.scl, recording.sda].map((s) => crossings(s, 0.7 * vdd, recording.endPs));
  const low = [recording.scl, recording.sda].map((s) => crossings(s, 0.3 * vdd, recording.endPs));
  const step = 1e12 / scope.rate_hz;
  const error = step * Math.min(0.29, 0.02 + scope.noise_v / (0.2 * vdd));
  const decided = [0, 1].map((line) => hysteresis(high[line], low[line], () => error * random.gauss()));
  const block = merge(decided[0], decided[1], { rate_hz: null, phase_s: 0, threshold: 0.5 });
  return { ...block, volts: voltColumns(block, recording, decided, scope, random) };
}

interface Decided extends Crossings {
  readonly lead: number[];
}

function hysteresis(high: Crossings, low: Crossings, error: () => number): Decided {
  const out: Decided = { at: [], level: [], lead: [] };
  let level = 1;
  let lastHigh = 0;
  let lastLow = 0;
  let i = 0;
  let j = 0;
  while (i < high.at.length || j < low.at.length) {
    const a = i < high.at.length ? high.at[i] : Number.POSITIVE_INFINITY;
    const b = j < low.at.length ? low.at[j] : Number.POSITIVE_INFINITY;
    if (a <= b) {
      if (high.level[i] === 1 && level === 0) {
        level = 1;
        out.at.push(Math.round(a + error()));
        out.level.push(1);
        out.lead.push(a - lastLow);
      }
      lastHigh = a;
      i++;
    } else {
      if (low.level[j] === 0 && level === 1) {
        level = 0;
        out.at.push(Math.round(b + error()));
        out.level.push(0);
        out.lead.push(b - lastHigh);
      }
      lastLow = b;
      j++;
    }
  }
  return out;
}

function voltColumns(
  block: EdgeBlock,
  recording: Recording,
  decided: readonly Decided[],
  scope: Scope,
  random: Random,
): VoltColumns {
  const n = block.length;
  const lead = [new Float32Array(n), new Float32Array(n)];
  const mean = [new Float32Array(n), new Float32Array(n)];
  const cursor = [0, 0];
  const segment = [0, 0];
  const traces = [recording.scl, recording.sda];
  for (let e = 0; e < n; e++) {
    const from = block.ticks[e];
    const to = e + 1 < n ? block.ticks[e + 1] : recording.endPs;
    for (let line = 0; line < 2; line++) {
      const d = decided[line];
      while (cursor[line] < d.at.length && d.at[cursor[line]] < from) cursor[line]++;
      const moved = e > 0 && cursor[line] < d.at.length && d.at[cursor[line]] === from;
      lead[line][e] = moved ? d.lead[cursor[line]] : 0;
      const settle = moved ? 4 * Math.max(1, d.lead[cursor[line]]) : 0;
      const samples = Math.floor(((to - from - settle) / 1e12) * scope.rate_hz);
      const exact = average(traces[line], from + settle, to, segment, line);
      const spread = Math.hypot(scope.noise_v / Math.sqrt(Math.max(1, samples)), scope.step_v / 12);
      mean[line][e] = samples < 1 ? Number.NaN : exact + spread * random.gauss();
    }
  }
  return { leadScl: lead[0], leadSda: lead[1], meanScl: mean[0], meanSda: mean[1] };
}

/** Time average of the voltage between two instants; `segment[line]` moves forward with the calls. */
function average(trace: Segments, from: number, to: number, segment: number[], line: number): number {
  let s = segment[line];
  while (s + 1 < trace.at.length && trace.at[s + 1] <= from) s++;
  segment[line] = s;
  let area = 0;
  for (let t = from; t < to; s++) {
    const end = Math.min(to, s + 1 < trace.at.length ? trace.at[s + 1] : to);
    const a = Math.exp(-(t - trace.at[s]) / trace.tau[s]);
    const b = Math.exp(-(end - trace.at[s]) / trace.tau[s]);
    area += trace.target[s] * (end - t) + (trace.v0[s] - trace.target[s]) * trace.tau[s] * (a - b);
    t = end;
  }
  return to > from ? area / (to - from) : Number.NaN;
}
