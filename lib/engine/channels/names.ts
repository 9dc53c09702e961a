// In: channel names. Out: what each name says about the line (which line, how strongly), and the channel a person's own
// words name.

import { ok, type Problem, type Result, refuse } from "../../base/result";
import type { Channel } from "../samples/reader";

/** What a name says. `stem` is the name without the telling word, so that SCL and SDA of one bus share it. */
export interface NameClue {
  readonly line: "scl" | "sda" | null;
  /** 3: SCL/SDA themselves. 1: clock and data words. Half a point less for a driver's own signal (scl_oe, sda_o). 0: nothing. */
  readonly strength: number;
  readonly stem: string;
  /** Nothing but SCL or SDA, a unit aside. */
  readonly exact: boolean;
  /** The name belongs to something else: SPI, UART, PWM, encoder. */
  readonly foreign: boolean;
}

const CLOCK_WORDS = /^(?:clk|clock|ck|sck|sclk|clk\d*|smb?clk|smbclock|tw[c]?ck|takt|.{0,4}clk|.{0,4}clock|clk.{0,3})$/;
const DATA_WORDS = /^(?:data|dat|sdat|sdata|sd|smb?dat|smb?data|twd|daten|.{0,4}dat|.{0,4}data|(?:dat|data).{0,3})$/;
const FOREIGN_WORDS = new Set(
  "mosi miso cs csn ncs ss ssn nss sdi sdo copi cipi tx rx txd rxd uart rts cts pwm hall enc encoder phase step dir motor cmd usb dp dm".split(
    " ",
  ),
);
const DRIVER_WORDS = new Set("o oe oen oeb en out t drv drive driver pull low reg next d q int sync dly".split(" "));

function words(name: string): string[] {
  return name
    .replace(/([a-z])([A-Z])/g, "$1_$2")
    .toLowerCase()
    .split(/[^a-z]+/)
    .filter((word) => word !== "");
}

function lineOf(word: string): { line: "scl" | "sda"; strength: number } | null {
  if (/^scl(?!k)/.test(word) || /scl$/.test(word)) return { line: "scl", strength: 3 };
  if ((/^sda(?!t)/.test(word) || /sda$/.test(word)) && !/^sdata/.test(word)) return { line: "sda", strength: 3 };
  if (CLOCK_WORDS.test(word)) return { line: "scl", strength: 1 };
  if (DATA_WORDS.test(word)) return { line: "sda", strength: 1 };
  return null;
}

/** Reads one name. Only its last path part counts for the words; the path stays in the stem. */
export function clueOf(channel: { readonly id: string; readonly name: string }): NameClue {
  const parts = words(channel.name);
  let best: { line: "scl" | "sda"; strength: number; word: string } | null = null;
  for (const word of parts) {
    const found = lineOf(word);
    if (found && (best === null || found.strength > best.strength)) best = { ...found, word };
  }
  const foreign = best?.strength !== 3 && parts.some((word) => FOREIGN_WORDS.has(word));
  const path = channel.id.endsWith(channel.name) ? channel.id : channel.name;
  if (best === null) return { line: null, strength: 0, stem: path.toLowerCase(), exact: false, foreign };
  const core = best.strength === 3 ? best.line : best.word;
  const lower = path.toLowerCase();
  const at = lower.lastIndexOf(core);
  const driver = parts.some((word) => DRIVER_WORDS.has(word));
  return {
    line: best.line,
    strength: best.strength - (driver ? 0.5 : 0),
    stem: `${lower.slice(0, at)}*${lower.slice(at + core.length)}`,
    exact: best.strength === 3 && parts.every((word) => word === best.line || word === "v" || word === "mv" || word === "volts"),
    foreign,
  };
}

const squeeze = (text: string) => text.replace(/\s+/g, "").replace(/^\\/, "");

/** At most twelve channels, for a sentence that says what there is. */
export function listChannels(channels: readonly Channel[]): string {
  if (channels.length === 0) return "no channel";
  const shown = channels.slice(0, 12).map((channel) => {
    if (channel.name === "" || channel.id === channel.name || channel.id.endsWith(channel.name)) return channel.id;
    return `${channel.id} (${channel.name})`;
  });
  return shown.join(", ") + (channels.length > 12 ? ` and ${channels.length - 12} more` : "");
}

/**
 * The channel a person's words name: its id, its unique name, or its path's unique ending. `same` tells two names of one
 * net apart from two nets, so an alias is not ambiguous.
 */
export function findChannel(
  channels: readonly Channel[],
  wanted: string,
  same: (a: Channel, b: Channel) => boolean = () => false,
): Result<Channel> {
  const key = squeeze(wanted);
  const lower = key.toLowerCase();
  const readings: ((channel: Channel) => boolean)[] = [
    (channel) => channel.id === wanted || squeeze(channel.id) === key,
    (channel) => channel.name === wanted || squeeze(channel.name) === key,
    (channel) => squeeze(channel.id).endsWith(`.${key}`),
    (channel) => squeeze(channel.id).toLowerCase() === lower || squeeze(channel.name).toLowerCase() === lower,
    (channel) => squeeze(channel.id).toLowerCase().endsWith(`.${lower}`),
    // A vector without its bit: one bit is meant if it has only one; else the answer lists them.
    (channel) =>
      /\[-?\d+\]$/.test(channel.id) && [channel.id, channel.name].some((text) => squeeze(text).replace(/\[-?\d+\]$/, "") === key),
  ];
  for (const reading of readings) {
    const found = key === "" ? [] : channels.filter(reading);
    if (found.length === 1 || (found.length > 1 && found.every((channel) => same(found[0], channel)))) return ok(found[0]);
    if (found.length > 1) return refuse(ambiguous(wanted, found));
  }
  return refuse({
    code: "unknown-channel",
    message: `There is no channel "${wanted}" in this file; it has ${listChannels(channels)}.`,
    advice:
      "Name a channel as the file does: a CSV header cell or @N, a VCD path or its last part, one bit of a vector as name[0].",
    place: {},
  });
}

function ambiguous(wanted: string, found: readonly Channel[]): Problem {
  return {
    code: "ambiguous-channel",
    message: `"${wanted}" names ${found.length} channels of this file: ${listChannels(found)}.`,
    advice: "Give the one you mean in full: a VCD path, or @N for the N-th column of a CSV.",
    place: {},
  };
}
