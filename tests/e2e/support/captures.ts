// Captures made for browser tests: a pump controller that reads a tank level, and a probe that does not answer.

import { gateway, job, LEVEL, OXYGEN, pump, register, targets, VALVES } from "@/fixtures/demo/hatchery";
import { type Recording, simulate } from "@/lib/simulation/bus";
import { csvChanges, csvLevels, csvVolts, vcd } from "@/lib/simulation/files";
import { controller, scenario } from "@/lib/simulation/plan";
import { createRandom } from "@/lib/simulation/random";
import { write } from "@/lib/simulation/script";

/** What a file picker takes. */
export interface TestFile {
  readonly name: string;
  readonly mimeType: string;
  readonly buffer: Buffer;
}

const GAP_S = 1.5e-3;
const INSTRUMENT = { rate_hz: 20e6, phase_s: 0, threshold: 0.5 };
export const MEBI = 1_048_576;

function file(name: string, bytes: Uint8Array | string): TestFile {
  return { name, mimeType: "text/plain", buffer: Buffer.from(bytes) };
}

/** `messages` register reads; every fourth asks the probe that is not there. */
function readings(messages: number): Recording {
  const jobs = Array.from({ length: messages }, (_, i) =>
    job(3e-4 + i * GAP_S, ...(i % 4 === 3 ? register(OXYGEN, 0x10, 1) : register(LEVEL, 0x00, 2))),
  );
  return simulate(scenario(5, 3e-4 + messages * GAP_S, { controllers: [pump(jobs)], targets: targets() }));
}

/**
 * Twelve messages as CSV: nine level readings (a write and a read each), three unanswered calls at 0x3D. The columns stand in
 * the order given.
 */
export function busCsv(name: string, header = "Time [s],SCL,SDA"): TestFile {
  const text = Buffer.from(csvChanges(readings(12), INSTRUMENT)).toString();
  return file(name, text.replace(/^.*\n/, `${header}\n`));
}

/** Two controllers taking turns, as a VCD with drive taps. */
export function busVcd(name: string): TestFile {
  const pumps = Array.from({ length: 6 }, (_, i) => job(4e-4 + i * 3e-3, ...register(LEVEL, 0x00, 2)));
  const gateways = Array.from({ length: 6 }, (_, i) => job(1.8e-3 + i * 3e-3, write(VALVES, [0x02, 0x01])));
  const recording = simulate(scenario(9, 0.02, { controllers: [pump(pumps), gateway(gateways)], targets: targets() }));
  return file(name, vcd(recording, INSTRUMENT, []));
}

/** Every sample as a row, so that the file is longer than one part of an upload (8 MiB): two parts. */
export function longCsv(name: string): TestFile {
  return file(name, csvLevels(readings(4), { ...INSTRUMENT, rate_hz: 100e6 }));
}

/** Volts of a controller whose high is a little too short for Standard-mode. */
export function hurriedVolts(name: string): TestFile {
  const jobs = Array.from({ length: 6 }, (_, i) => job(3e-4 + i * GAP_S, ...register(LEVEL, 0x00, 2)));
  const hurried = controller("pump", { thigh_s: 3.7e-6, tlow_s: 6.4e-6 }, { jobs });
  const recording = simulate(scenario(6, 0.0095, { controllers: [hurried], targets: targets() }));
  return file(name, csvVolts(recording, { rate_hz: 20e6, noise_v: 0.008, step_v: 0.0156 }, createRandom(4)));
}

/** A web page that somebody saved under the name of an export. */
export function savedPage(name: string): TestFile {
  return file(name, "<!DOCTYPE html>\n<html><head><title>Scope</title></head><body>Please sign in.</body></html>\n");
}

/** Three phases of a motor: levels that change, but no bus. */
export function motorCsv(name: string): TestFile {
  const rows = ["Time [s],U,V,W"];
  for (let i = 0; i < 3000; i++) {
    const phase = (at: number) => ((i + at) % 60 < 30 ? 1 : 0);
    rows.push(`${(i * 1e-5).toFixed(5)},${phase(0)},${phase(20)},${phase(40)}`);
  }
  return file(name, `${rows.join("\n")}\n`);
}
