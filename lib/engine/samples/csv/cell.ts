// In: the bytes of one cell. Out: what it says, as an exact decimal number or a logic word. The one grammar that the
// byte scanner, the fast paths' fallback and the papaparse path share, so that they cannot disagree about a cell.

/** What a cell turned out to be. */
export const BAD = 0;
export const NUMBER = 1;
/** Empty, NaN, inf, ---, clipped: the instrument had no reading. Never low. */
export const UNKNOWN = 2;
export const LOW = 3;
export const HIGH = 4;
/** A word of bits written 0x.. or 0b..; its value is `mantissa`. */
export const BITS = 5;
/** A released line written Z. */
export const RELEASED = 6;

const WORDS: Readonly<Record<string, number>> = {
  low: LOW,
  lo: LOW,
  l: LOW,
  false: LOW,
  f: LOW,
  off: LOW,
  high: HIGH,
  hi: HIGH,
  h: HIGH,
  true: HIGH,
  t: HIGH,
  on: HIGH,
  z: RELEASED,
  x: UNKNOWN,
  u: UNKNOWN,
  w: UNKNOWN,
  "?": UNKNOWN,
  "": UNKNOWN,
  nan: UNKNOWN,
  "-nan": UNKNOWN,
  "+nan": UNKNOWN,
  "nan(ind)": UNKNOWN,
  "-nan(ind)": UNKNOWN,
  inf: UNKNOWN,
  "+inf": UNKNOWN,
  "-inf": UNKNOWN,
  infinity: UNKNOWN,
  "-infinity": UNKNOWN,
  "1.#inf": UNKNOWN,
  "-1.#inf": UNKNOWN,
  "1.#qnan": UNKNOWN,
  "-1.#ind": UNKNOWN,
  "n/a": UNKNOWN,
  "#n/a": UNKNOWN,
  na: UNKNOWN,
  null: UNKNOWN,
  none: UNKNOWN,
  clipped: UNKNOWN,
  clipping: UNKNOWN,
  overflow: UNKNOWN,
  underflow: UNKNOWN,
  ovl: UNKNOWN,
  ovr: UNKNOWN,
  overrange: UNKNOWN,
};

/** Engineering suffixes; both code points of the micro sign arrive here as "u". */
const SUFFIX: Readonly<Record<string, number>> = { f: -15, p: -12, n: -9, u: -6, m: -3, k: 3, K: 3, M: 6, G: 9 };

/** Powers of ten that are exact doubles. */
export const POWERS = Float64Array.from({ length: 23 }, (_, power) => Number(`1e${power}`));

/** mantissa x 10^exponent, rounded once where the exponent is within +-22 (powers up to 1e22 are exact doubles). */
export function scaled(mantissa: number, exponent: number): number {
  if (exponent >= 0) return exponent <= 22 ? mantissa * POWERS[exponent] : mantissa * 10 ** exponent;
  return exponent >= -22 ? mantissa / POWERS[-exponent] : mantissa / 1e22 / 10 ** (-exponent - 22);
}

/** " µs" with its micro sign in two bytes, and room for blanks. */
const LONGEST_TAIL = 8;
const LONGEST_WORD = 52;

/** Digits of a mantissa stay exact below this; further digits only move the exponent. */
const MANTISSA_ROOM = 900_719_925_474_098;

/** Reads cells one after the other into its own fields, so that no object is made per cell. */
export class Cell {
  kind = BAD;
  /** With sign; the number is mantissa x 10^exponent. */
  mantissa = 0;
  exponent = 0;

  /** `decimal` is the byte of the decimal mark. */
  read(bytes: Uint8Array, from: number, to: number, decimal: number): number {
    let start = from;
    let end = to;
    while (start < end && isBlank(bytes[start])) start += 1;
    while (end > start && isBlank(bytes[end - 1])) end -= 1;
    this.kind = this.number(bytes, start, end, decimal) ? NUMBER : this.word(bytes, start, end);
    return this.kind;
  }

  private number(bytes: Uint8Array, from: number, to: number, decimal: number): boolean {
    let p = from;
    const negative = bytes[p] === 45;
    if (p < to && (bytes[p] === 43 || negative)) p += 1;
    if (bytes[p] === 48 && p + 2 < to && (bytes[p + 1] | 32) === 120) return false;
    let mantissa = 0;
    let exponent = 0;
    let digits = 0;
    let fraction = false;
    for (; p < to; p += 1) {
      const digit = bytes[p] - 48;
      if (digit >= 0 && digit <= 9) {
        digits += 1;
        if (mantissa < MANTISSA_ROOM) {
          mantissa = mantissa * 10 + digit;
          if (fraction) exponent -= 1;
        } else if (!fraction) exponent += 1;
      } else if (bytes[p] === decimal && !fraction) fraction = true;
      else break;
    }
    if (digits === 0) return false;
    if (bytes[p] === 58 && !fraction) return this.timeOfDay(bytes, from, to, decimal);
    this.mantissa = negative ? -mantissa : mantissa;
    this.exponent = exponent;
    return p === to || this.tail(bytes, p, to);
  }

  /** "12:34:56.789" is 45296.789 s. */
  private timeOfDay(bytes: Uint8Array, from: number, to: number, decimal: number): boolean {
    let text = "";
    for (let p = from; p < Math.min(to, from + 24); p += 1) text += bytes[p] === decimal ? "." : String.fromCharCode(bytes[p]);
    const match = /^(\d{1,2}):([0-5]\d):([0-5]\d)(?:\.(\d{1,9}))?$/.exec(text);
    if (match === null) return false;
    const places = match[4]?.length ?? 0;
    const whole = Number(match[1]) * 3600 + Number(match[2]) * 60 + Number(match[3]);
    this.mantissa = whole * POWERS[places] + Number(match[4] ?? 0);
    this.exponent = -places;
    return true;
  }

  /** After the digits: an exponent, an engineering suffix, a unit, in that order and each optional. */
  private tail(bytes: Uint8Array, from: number, to: number): boolean {
    let p = from;
    if ((bytes[p] | 32) === 101) {
      const sign = bytes[p + 1] === 45 ? -1 : 1;
      let q = bytes[p + 1] === 45 || bytes[p + 1] === 43 ? p + 2 : p + 1;
      let power = 0;
      const first = q;
      for (; q < to && bytes[q] >= 48 && bytes[q] <= 57; q += 1) power = Math.min(power * 10 + bytes[q] - 48, 9999);
      if (q === first) return false;
      this.exponent += sign * power;
      p = q;
    }
    if (p === to) return true;
    if (to - p > LONGEST_TAIL) return false;
    let text = "";
    for (; p < to; p += 1) text += String.fromCharCode(bytes[p]);
    text = text.trim().replace(/^(Â?µ|Î¼)/, "u");
    const match = /^([fpnumkKMG]?)(s|S|V|v|sec)?$/.exec(text);
    if (match === null) return false;
    this.exponent += match[1] === "" ? 0 : SUFFIX[match[1]];
    return true;
  }

  private word(bytes: Uint8Array, from: number, to: number): number {
    if (to - from > LONGEST_WORD || startsNumber(bytes, from, to)) return BAD;
    let text = "";
    for (let p = from; p < to; p += 1) text += String.fromCharCode(bytes[p]);
    text = text.toLowerCase();
    const known = WORDS[text];
    if (known !== undefined) return known;
    if (/^[-*]{1,8}$/.test(text)) return UNKNOWN;
    const bits = /^(?:0x([0-9a-f]{1,12})|0b([01]{1,48}))$/.exec(text);
    if (bits === null) return BAD;
    this.mantissa = bits[1] !== undefined ? Number.parseInt(bits[1], 16) : Number.parseInt(bits[2], 2);
    this.exponent = 0;
    return BITS;
  }

  /** The number as a double; only after NUMBER or BITS. */
  value(): number {
    return scaled(this.mantissa, this.exponent);
  }

  /** Level of a digital column: 0, 1, 2 for unknown, -1 where the cell says none of these. */
  level(): number {
    if (this.kind === NUMBER) return this.mantissa === 0 ? 0 : this.value() === 1 ? 1 : -1;
    if (this.kind === LOW) return 0;
    if (this.kind === HIGH || this.kind === RELEASED) return 1;
    if (this.kind === BITS && this.mantissa <= 1) return this.mantissa;
    return this.kind === UNKNOWN ? 2 : -1;
  }
}

function isBlank(byte: number): boolean {
  return byte === 32 || byte === 9 || byte === 0xa0;
}

/** A digit that begins neither 0x, 0b nor 1.#: no word. */
function startsNumber(bytes: Uint8Array, from: number, to: number): boolean {
  const first = bytes[from];
  if (first < 48 || first > 57 || to - from < 2) return false;
  const second = bytes[from + 1] | 32;
  return !(first === 48 && (second === 120 || second === 98)) && !(first === 49 && bytes[from + 2] === 35);
}

const scratch = new Uint8Array(512);

/** Reads a cell from a string; characters past U+00FF become "?". */
export function readText(cell: Cell, text: string, decimal: number): number {
  const length = Math.min(text.length, scratch.length);
  for (let i = 0; i < length; i += 1) {
    const unit = text.charCodeAt(i);
    scratch[i] = unit === 0x3bc ? 0xb5 : unit > 0xff ? 63 : unit;
  }
  return cell.read(scratch, 0, length, decimal);
}
