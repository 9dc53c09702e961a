// In: a recording and an instrument. Out: the bytes of the file that the instrument would export: CSV in levels or volts, or
// VCD (IEEE 1364-2005 clause 18) with one scope for the bus and one per drive tap.

import { type EdgeBlock, SCL, SDA } from "../engine/samples/edges";
import type { Recording } from "./bus";
import type { Random } from "./random";
import { captureLevels, captureTap, captureVolts, type Instrument, type Scope } from "./sampling";

const encoder = { encode: (text: string): Uint8Array => Uint8Array.from(text, (c) => c.charCodeAt(0)) };

/** Every sample as a row: time, SCL, SDA as 0/1. `offset_s` is the time of the first row. */
export function csvLevels(recording: Recording, instrument: Instrument & { readonly rate_hz: number }, offset_s = 0): Uint8Array {
  const block = captureLevels(recording, instrument);
  const step = 1 / instrument.rate_hz;
  const count = Math.floor((recording.endPs / 1e12 - instrument.phase_s) * instrument.rate_hz);
  const digits = Math.min(12, Math.max(1, Math.ceil(-Math.log10(step)) + 1));
  const rows: string[] = ["Time [s],SCL,SDA"];
  let e = 0;
  for (let k = 0; k < count; k++) {
    const tick = Math.round((instrument.phase_s + k * step) * 1e12);
    while (e + 1 < block.length && block.ticks[e + 1] <= tick) e++;
    const lines = block.lines[e];
    rows.push(`${(offset_s + k * step).toFixed(digits)},${lines & SCL ? 1 : 0},${lines & SDA ? 1 : 0}`);
  }
  rows.push("");
  return encoder.encode(rows.join("\n"));
}

/** A row per change: time, SCL, SDA. */
export function csvChanges(recording: Recording, instrument: Instrument): Uint8Array {
  const block = captureLevels(recording, instrument);
  const rows: string[] = ["Time [s],SCL,SDA"];
  for (let e = 0; e < block.length; e++) {
    rows.push(`${(block.ticks[e] / 1e12).toFixed(9)},${block.lines[e] & SCL ? 1 : 0},${block.lines[e] & SDA ? 1 : 0}`);
  }
  rows.push(`${(recording.endPs / 1e12).toFixed(9)},1,1`, "");
  return encoder.encode(rows.join("\n"));
}

/** Oscilloscope export: preamble, units row, semicolons and decimal commas when `continental`. */
export function csvVolts(recording: Recording, scope: Scope, random: Random, continental = false): Uint8Array {
  const { scl, sda } = captureVolts(recording, scope, random);
  const mark = continental ? ";" : ",";
  const number = (value: number, digits: number): string => {
    const text = value.toFixed(digits);
    return continental ? text.replace(".", ",") : text;
  };
  const rows: string[] = [
    `Record length${mark}${scl.length}`,
    `Sample interval${mark}${(1 / scope.rate_hz).toExponential(6)}`,
    `Time${mark}SCL${mark}SDA`,
    `s${mark}V${mark}V`,
  ];
  const digits = Math.min(12, Math.ceil(Math.log10(scope.rate_hz)) + 1);
  for (let k = 0; k < scl.length; k++) {
    rows.push(`${number(k / scope.rate_hz, digits)}${mark}${number(scl[k], 4)}${mark}${number(sda[k], 4)}`);
  }
  rows.push("");
  return encoder.encode(rows.join("\r\n"));
}

/** Value change dump. `taps` names the controllers whose drive is recorded too, by index. */
export function vcd(recording: Recording, instrument: Instrument, taps: readonly { index: number; label: string }[]): Uint8Array {
  const step = instrument.rate_hz === null ? 1 : Math.max(1, Math.round(1e9 / instrument.rate_hz));
  const signals: { id: string; name: string; scope: string; bit: number; block: EdgeBlock }[] = [];
  const add = (scope: string, block: EdgeBlock): void => {
    signals.push({ id: String.fromCharCode(33 + signals.length), name: "scl", scope, bit: SCL, block });
    signals.push({ id: String.fromCharCode(33 + signals.length), name: "sda", scope, bit: SDA, block });
  };
  add("bus", captureLevels(recording, instrument));
  for (const tap of taps) add(tap.label, captureTap(recording, tap.index, instrument));
  const lines: string[] = ["$timescale 1 ns $end", "$scope module tank $end"];
  for (let i = 0; i < signals.length; i += 2) {
    lines.push(`$scope module ${signals[i].scope} $end`);
    for (const signal of [signals[i], signals[i + 1]]) lines.push(`$var wire 1 ${signal.id} ${signal.name} $end`);
    lines.push("$upscope $end");
  }
  lines.push("$upscope $end", "$enddefinitions $end", "#0", "$dumpvars", ...signals.map((s) => `1${s.id}`), "$end");
  const changes: { tick: number; text: string }[] = [];
  for (const { id, bit, block } of signals) {
    for (let e = 1; e < block.length; e++) {
      if (((block.lines[e] ^ block.lines[e - 1]) & bit) === 0) continue;
      changes.push({ tick: Math.round(block.ticks[e] / 1000 / step) * step, text: `${block.lines[e] & bit ? 1 : 0}${id}` });
    }
  }
  changes.sort((a, b) => a.tick - b.tick);
  let last = 0;
  for (const change of changes) {
    if (change.tick !== last) lines.push(`#${change.tick}`);
    last = change.tick;
    lines.push(change.text);
  }
  lines.push(`#${Math.round(recording.endPs / 1000)}`, "");
  return encoder.encode(lines.join("\n"));
}
