// In: lines that make no bus. Out: the refusal that says what was found instead.

import type { Problem } from "../../base/result";
import type { Channel } from "../samples/reader";
import { portray } from "./behaviour";
import { type Line, label } from "./line";
import { listChannels } from "./names";

export function noChannels(channels: readonly Channel[]): Problem {
  return {
    code: "no-channels",
    message: `No channel of this file carries levels or volts (it has ${listChannels(channels)}).`,
    advice: "Export the two bus lines, SCL and SDA, as 0/1 or volts.",
    place: {},
  };
}

export function oneChannel(line: Line): Problem {
  return {
    code: "one-channel",
    message: `Only one channel is here: ${label(line)}, which ${portray(line.trace)}. A two-wire bus needs SCL and SDA.`,
    advice: "Export both lines of the bus into one file.",
    place: {},
  };
}

/** Why no pair was taken, with what every line does. */
export function foundInstead(lines: readonly Line[]): Problem {
  const active = lines.filter((line) => line.trace.length > 0);
  const shown = lines.slice(0, 8).map((line) => `${label(line)} ${portray(line.trace)}`);
  const rest = lines.length > 8 ? `; and ${lines.length - 8} more` : "";
  const what = `${shown.join("; ")}${rest}`;
  const advice = "Check that the probes were on SCL and SDA and that the bus was in use; or name the two channels.";
  if (active.length === 0) return { code: "no-activity", message: `No line of this file changes: ${what}.`, advice, place: {} };
  if (active.length === 1) {
    return { code: "no-clock", message: `Only one line of this file changes, so nothing clocks it: ${what}.`, advice, place: {} };
  }
  return { code: "not-a-bus", message: `No two lines of this file behave as SCL and SDA: ${what}.`, advice, place: {} };
}
