// In: the words of a command line. Out: what was asked for, or what is wrong with it. See REPORT-JSON in README.md.

import { parseArgs } from "node:util";
import type { TapChoice } from "../../lib/engine/samples/reader";

export const USAGE = `usage: npm run --silent decode -- FILE [options]
  --scl NAME --sda NAME        channels (default: found from names, else from behaviour)
      NAME: a VCD path (top.bus.SCL) or its last part, one bit of a vector as name[0]; a CSV header cell, or @N for
      the N-th column counted from 1
  --tap LABEL=SCLNAME,SDANAME  what one device itself drives, repeatable; a missing one of the two is written -
  --tap-polarity LABEL=drive|release   what a 1 on the tap means (default release)
  --interval SECONDS           sample interval where the file has no time column
  --vdd V --vil V --vih V      levels for a capture in volts (default: estimated, 0.3/0.7 VDD)
  --limits NAME|FILE           limits profile (default: the slowest mode that the measured SCL fits); built in:
      "Standard-mode", "Fast-mode", "Fast-mode Plus", "High-speed", "SMBus 2.0", "SMBus 3 100 kHz",
      "SMBus 3 400 kHz", "SMBus 3 1 MHz"
  --cb PF                      bus capacitance for High-speed, 100 to 400
  --roster FILE                devices and controllers on the bus (CSV)
  --log FILE                   controller log (time, controller, message)
  --json | --text              machine-readable, or for reading (default)
exit code: 0 decoded and within limits; 1 decoded, something failed; 2 usage; 3 the file cannot be read or decoded
`;

export interface Asked {
  readonly file: string;
  readonly scl?: string;
  readonly sda?: string;
  readonly taps: readonly TapChoice[];
  readonly interval_s?: number;
  readonly vdd_v?: number;
  readonly vil_v?: number;
  readonly vih_v?: number;
  readonly limits: string | null;
  readonly cb_pf: number | null;
  readonly roster: string | null;
  readonly log: string | null;
  readonly json: boolean;
}

/** Wrong use of the command: what is wrong, in one sentence. */
export class UsageError extends Error {}

const text = { type: "string" } as const;
const OPTIONS = {
  scl: text,
  sda: text,
  tap: { type: "string", multiple: true },
  "tap-polarity": { type: "string", multiple: true },
  interval: text,
  vdd: text,
  vil: text,
  vih: text,
  limits: text,
  cb: text,
  roster: text,
  log: text,
  json: { type: "boolean" },
  text: { type: "boolean" },
  help: { type: "boolean", short: "h" },
} as const;

/** @returns null where only the usage was asked for */
export function readOptions(words: readonly string[]): Asked | null {
  const { values, positionals } = parsed(words);
  if (values.help === true) return null;
  if (positionals.length === 0) throw new UsageError("No file is named.");
  if (positionals.length > 1) throw new UsageError(`One file at a time: "${positionals[1]}" is one too many.`);
  if (values.json === true && values.text === true) throw new UsageError("--json and --text exclude each other.");
  if ((values.scl === undefined) !== (values.sda === undefined)) throw new UsageError("--scl and --sda belong together.");
  if (values.scl !== undefined && values.scl === values.sda) throw new UsageError("--scl and --sda name the same channel.");
  const number = (name: "interval" | "vdd" | "vil" | "vih" | "cb") => positive(name, values[name]);
  const [vdd_v, vil_v, vih_v] = [number("vdd"), number("vil"), number("vih")];
  if (vil_v !== undefined && vih_v !== undefined && vil_v >= vih_v) throw new UsageError("--vil must be below --vih.");
  const cb = number("cb");
  if (cb !== undefined && cb > 400) throw new UsageError("--cb: High-speed is specified up to 400 pF.");
  return {
    file: positionals[0],
    scl: values.scl,
    sda: values.sda,
    taps: tapsOf(values.tap ?? [], values["tap-polarity"] ?? []),
    interval_s: number("interval"),
    vdd_v,
    vil_v,
    vih_v,
    limits: values.limits ?? null,
    cb_pf: cb ?? null,
    roster: values.roster ?? null,
    log: values.log ?? null,
    json: values.json === true,
  };
}

function parsed(words: readonly string[]) {
  try {
    return parseArgs({ args: [...words], options: OPTIONS, allowPositionals: true, strict: true });
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
}

function positive(name: string, word: string | undefined): number | undefined {
  if (word === undefined) return undefined;
  const value = word.trim() === "" ? Number.NaN : Number(word);
  if (!Number.isFinite(value) || value <= 0) throw new UsageError(`--${name} needs a number above 0, not "${word}".`);
  return value;
}

function tapsOf(taps: readonly string[], polarities: readonly string[]): TapChoice[] {
  const polarity = new Map<string, "drive" | "release">();
  for (const word of polarities) {
    const at = word.lastIndexOf("=");
    const way = word.slice(at + 1);
    if (at < 1 || (way !== "drive" && way !== "release"))
      throw new UsageError(`--tap-polarity "${word}": write LABEL=drive or LABEL=release.`);
    polarity.set(word.slice(0, at), way);
  }
  const found = taps.map((word): TapChoice => {
    const at = word.indexOf("=");
    const names = word.slice(at + 1).split(",");
    if (at < 1 || names.length !== 2 || names.some((name) => name === "")) {
      throw new UsageError(`--tap "${word}": write LABEL=SCLNAME,SDANAME, with - for a missing one.`);
    }
    const [scl, sda] = names.map((name) => (name === "-" ? null : name));
    if (scl === null && sda === null) throw new UsageError(`--tap "${word}" names no channel.`);
    const label = word.slice(0, at);
    return { label, scl, sda, polarity: polarity.get(label) ?? "release" };
  });
  const labels = found.map((tap) => tap.label);
  const twice = labels.find((label, i) => labels.indexOf(label) !== i);
  if (twice !== undefined) throw new UsageError(`--tap "${twice}" is given twice.`);
  for (const label of polarity.keys())
    if (!labels.includes(label)) throw new UsageError(`--tap-polarity names "${label}", which is no tap.`);
  return found;
}
