// In: the text of a unit or of a header cell. Out: the quantity and its power of ten.

import { scaled } from "./cell";

export interface Unit {
  readonly quantity: "time" | "voltage" | "count" | "rate" | "logic";
  /** Power of ten to seconds, volts or hertz. */
  readonly power: number;
  readonly symbol: string;
}

const PREFIX: Readonly<Record<string, number>> = { "": 0, f: -15, p: -12, n: -9, u: -6, m: -3, k: 3, K: 3, M: 6, G: 9 };
const LONG_PREFIX: Readonly<Record<string, string>> = {
  nano: "n",
  micro: "u",
  milli: "m",
  pico: "p",
  femto: "f",
  kilo: "k",
  mega: "M",
  giga: "G",
};

/** A unit standing alone, with or without brackets: "s", "(ms)", "[µs]", "Volt". Null where it is none. */
export function parseUnit(text: string): Unit | null {
  const bare = text
    .trim()
    .replace(/^[[(](.*)[\])]$/, "$1")
    .trim()
    .replace(/[\u00b5\u03bc]/g, "u");
  const long = /^(nano|micro|milli|pico|femto|kilo|mega|giga)?[- ]?(seconds?|volts?|hertz)$/i.exec(bare);
  if (long !== null) {
    const prefix = long[1] === undefined ? "" : LONG_PREFIX[long[1].toLowerCase()];
    const quantity = /^s/i.test(long[2]) ? "time" : /^v/i.test(long[2]) ? "voltage" : "rate";
    return unit(quantity, prefix, quantity === "time" ? "s" : quantity === "voltage" ? "V" : "Hz");
  }
  const time = /^([fpnum]?)(?:s|S|sec|secs|Sec|SEC)$/.exec(bare);
  if (time !== null) return unit("time", time[1], "s");
  const volt = /^([num]?)(?:V|v|VDC|Vdc)$/.exec(bare) ?? /^(k)V$/.exec(bare);
  if (volt !== null) return unit("voltage", volt[1], "V");
  const rate = /^([kKMG]?)(?:Hz|HZ|hz|Sa\/s|S\/s|SPS|sps|samples\/s)$/.exec(bare);
  if (rate !== null) return unit("rate", rate[1], "Hz");
  if (/^(lsb|counts?|codes?|adc|adu|raw|digits?)$/i.test(bare)) return { quantity: "count", power: 0, symbol: "counts" };
  if (/^(bool|boolean|logic|level|bit|bits|digital|d)$/i.test(bare)) return { quantity: "logic", power: 0, symbol: "logic" };
  return null;
}

function unit(quantity: Unit["quantity"], prefix: string, base: string): Unit {
  return { quantity, power: PREFIX[prefix], symbol: `${prefix === "u" ? "\u00b5" : prefix}${base}` };
}

export interface NamedUnit {
  readonly name: string;
  readonly unit: Unit | null;
}

/** "Time [s]", "Time(ms)", "Time/s", "CH1 in mV", "time_us" -> name and unit. A unit that is not known stays in the name. */
export function splitHeader(cell: string): NamedUnit {
  const text = cell.trim();
  const bracket = /^(.*?)[\s_]*[[(]\s*([^\])]*?)\s*[\])]$/.exec(text);
  const slash = /^(.+?)\s*\/\s*(\S+)$/.exec(text);
  const worded = /^(.+?)\s+in\s+(\S+)$/i.exec(text);
  const joined = /^(.+?)[\s_](\S+)$/.exec(text);
  for (const match of [bracket, slash, worded, joined]) {
    if (match === null) continue;
    const unit = parseUnit(match[2]);
    if (unit !== null && (match !== joined || unit.quantity === "time" || unit.quantity === "voltage"))
      return { name: match[1].trim(), unit };
  }
  return { name: text, unit: null };
}

/** Names that instruments and people give a time column. */
export function isTimeName(name: string): boolean {
  return (
    /^(time|times|t|x|x-?axis|sec|secs|seconds?|timestamp|time ?stamp|zeit|zeitachse|temps|tiempo|tempo|elapsed|elapsed time|relative time|rel\.? ?time|time ?base)\d*$/i.test(
      name
        .trim()
        .replace(/[_:]+/g, " ")
        .replace(/\s+(ch|channel)?\s*\w?$/i, "")
        .trim(),
    ) || /^(time|timestamp|zeit)\b/i.test(name.trim())
  );
}

/** Names of a running number. */
export function isOrdinalName(name: string): boolean {
  return /^(#|no\.?|nr\.?|n|i|idx|index|sample|samples|sample ?(no|nr|number|index)\.?|point|points|row|record|count|seq(uence)?)$/i.test(
    name.trim().replace(/_/g, " "),
  );
}

/** "1e-7", "100 ns", "10 MHz", "1,5 µs" with the unit apart or joined. Null where it is not a number. */
export function parseQuantity(text: string, decimal: string): { readonly value: number; readonly unit: Unit | null } | null {
  const match = /^([+-]?[\d.,]+(?:[eE][+-]?\d+)?)\s*(.*)$/.exec(text.trim());
  if (match === null) return null;
  const plain = decimal === "," ? match[1].replace(",", ".") : match[1];
  const number = Number(plain);
  if (!Number.isFinite(number)) return null;
  const unit = match[2] === "" ? null : parseUnit(match[2]);
  return { value: unit === null ? number : scaled(number, unit.power), unit };
}
