// In: the rows before the readings. Out: key/value pairs, and the sample interval and start time where they state one.

import { type HeadRow, trimmed } from "./dialect";
import { parseQuantity, parseUnit, splitHeader } from "./unit";

export type Metadata = readonly (readonly [string, string])[];

/** "Key,value", "Key: value", "# Key = value". A row without a value keeps its text as the key. */
export function metadataOf(rows: readonly HeadRow[]): Metadata {
  const pairs: [string, string][] = [];
  for (const row of rows) {
    const cells = trimmed(row.cells).map((text) => text.trim());
    if (cells.length === 0) continue;
    const first = cells[0].replace(/^(?:#|%|\/\/|;)+\s*/, "");
    const rest = cells.slice(1).filter((text) => text !== "");
    const joined = /^([^:=]+?)\s*[:=]\s*(.*)$/.exec(first);
    if (joined !== null) pairs.push([joined[1], [joined[2], ...rest].filter((text) => text !== "").join(" ")]);
    else if (first !== "" || rest.length > 0) pairs.push([first.replace(/[:=]\s*$/, ""), rest.join(" ")]);
  }
  return pairs;
}

const INTERVAL =
  /^(?:horizontal )?(?:sampl(?:e|ing) (?:interval|period|time|width|step|spacing)|interval|increment|x ?incr?(?:ement)?|delta ?t|dt|d ?x|ts|time ?(?:step|increment|interval|resolution)|(?:horizontal |h )?resolution|step)$/i;
const RATE = /^(?:sampl(?:e|ing) (?:rate|frequency|freq)|(?:sample)?rate|fs|samples per second|samplerate|sampling)$/i;
const START =
  /^(?:start|start ?(?:time|offset)|x ?(?:origin|zero|start|offset)|(?:time ?(?:of )?)?(?:first ?sample|zero|origin)|t ?0|time ?(?:offset|start)|begin)$/i;
const TRIGGER = /^(?:trigger ?(?:sample|position|index|point|address|offset|time|delay)?|pre ?trigger(?: samples?)?)$/i;

export interface StatedTiming {
  readonly interval_s: number | null;
  readonly intervalText: string;
  /** Time of the first sample; 0 where nothing is stated. */
  readonly start_s: number;
  readonly startText: string | null;
}

export function isTimingKey(key: string): boolean {
  const bare = keyOf(key).key;
  return INTERVAL.test(bare) || RATE.test(bare) || START.test(bare) || TRIGGER.test(bare);
}

function keyOf(text: string): { readonly key: string; readonly power: number } {
  const named = splitHeader(text.replace(/[:=]\s*$/, ""));
  const key = named.name
    .replace(/[_.-]+/g, " ")
    .replace(/([a-z])([A-Z])/g, "$1 $2")
    .replace(/\s+/g, " ")
    .trim();
  return { key, power: named.unit === null ? 0 : named.unit.power };
}

/** Reads a stated interval or rate, and a stated start or trigger sample. */
export function statedTiming(metadata: Metadata, decimal: string): StatedTiming {
  let interval: number | null = null;
  let intervalText = "";
  let start = 0;
  let startText: string | null = null;
  let triggerSamples: number | null = null;
  for (const [rawKey, text] of metadata) {
    const { key, power } = keyOf(rawKey);
    const quantity = parseQuantity(text, decimal);
    if (quantity === null) continue;
    const value = quantity.unit === null && power !== 0 ? quantity.value * 10 ** power : quantity.value;
    const isRate = RATE.test(key) || (quantity.unit !== null && quantity.unit.quantity === "rate" && INTERVAL.test(key));
    if (interval === null && isRate && value > 0 && quantity.unit?.quantity !== "time") {
      interval = 1 / value;
      intervalText = `${rawKey} ${text}`;
    } else if (interval === null && (INTERVAL.test(key) || isRate) && value > 0) {
      interval = value;
      intervalText = `${rawKey} ${text}`;
    } else if (startText === null && START.test(key)) {
      start = value;
      startText = `${rawKey} ${text}`;
    } else if (triggerSamples === null && TRIGGER.test(key)) {
      triggerSamples = quantity.unit === null && power === 0 ? (Number.isInteger(value) && value > 0 ? value : null) : null;
      if (triggerSamples !== null && startText === null) startText = `${rawKey} ${text}`;
    }
  }
  if (triggerSamples !== null && start === 0 && interval !== null) start = -triggerSamples * interval;
  return { interval_s: interval, intervalText, start_s: start, startText };
}

/** A units row: every cell is a unit or empty, at least one is a time or a voltage. Below names, other words may stand in it. */
export function isUnitsRow(cells: readonly string[], belowNames: boolean): boolean {
  let known = 0;
  for (const text of cells) {
    if (text.trim() === "") continue;
    const unit = parseUnit(text.replace(/^#\s*/, ""));
    if (unit === null && (!belowNames || /\d/.test(text))) return false;
    if (unit !== null && unit.quantity !== "logic") known += 1;
  }
  return known > 0;
}
