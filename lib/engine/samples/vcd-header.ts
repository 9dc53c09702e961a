// In: the declaration part of a VCD, in chunks. Out: its variables, timescale and remarks. IEEE 1364-2005 clause 18.2:
// free format, any white space; a variable's identifier code may begin with $, # or a digit and is told apart by position.

import type { Problem } from "../../base/result";
import { decode } from "../bytes/text";

/** One $var as declared. Several may share one code: they are the same net. */
export interface Declared {
  readonly type: string;
  readonly size: number;
  readonly code: string;
  /** Scopes and name joined by dots, without the range; an escaped name stands without its backslash. */
  readonly path: string;
  readonly name: string;
  /** [msb, lsb] as written, or null. */
  readonly range: readonly [number, number] | null;
  /** $var port of an extended VCD. */
  readonly port: boolean;
}

export interface Header {
  readonly variables: readonly Declared[];
  /** Seconds per step, or null where the file does not say (or says 0, as one simulator once did). */
  readonly step_s: { readonly count: number; readonly unit: number } | null;
  readonly metadata: readonly (readonly [string, string])[];
}

/** Power of ten of each unit of $timescale. */
const UNITS: Readonly<Record<string, number>> = { s: 0, ms: -3, us: -6, ns: -9, ps: -12, fs: -15 };
/** Remarks are kept up to this many characters. */
const REMARK = 400;
/** No word of a header is longer, so a file without white space is not a VCD. */
const WORD = 65_536;

const KEPT = new Set(["$date", "$version", "$comment", "$timescale"]);

/** Feed chunks until `done`. `place` is the byte of the word that a problem is about. */
export class HeaderReader {
  done = false;
  problem: Problem | null = null;
  readonly variables: Declared[] = [];
  readonly metadata: (readonly [string, string])[] = [];
  step: Header["step_s"] = null;
  private scopes: string[] = [];
  /** Words of the section that is open, its keyword first. */
  private section: string[] = [];
  private sectionAt = 0;
  private carry: number[] = [];
  private at = 0;

  /** Reads on; returns the index after the header's last byte, or `bytes.length`. */
  push(bytes: Uint8Array): number {
    for (let i = 0; i < bytes.length; i++) {
      const c = bytes[i];
      if (c > 32) {
        this.carry.push(c);
        if (this.carry.length > WORD) this.refuse("not-vcd", `a word of more than ${WORD} characters`, this.at + i - WORD);
      } else if (this.carry.length > 0) {
        const word = decode(Uint8Array.from(this.carry), "utf-8");
        this.word(word, this.at + i - this.carry.length);
        this.carry = [];
      }
      if (this.done || this.problem) {
        this.at += i;
        return i;
      }
    }
    this.at += bytes.length;
    return bytes.length;
  }

  /** The file ended inside the header. */
  finish(name: string): Problem {
    if (this.at === 0) {
      return { code: "empty", message: `${name} is empty.`, advice: "Export the capture again.", place: { byte: 0 } };
    }
    return {
      code: "vcd-header",
      message: `${name} ends inside its header, at byte ${this.at}: no $enddefinitions was found.`,
      advice: "The file was cut off or is not a VCD; export it again.",
      place: { byte: this.at },
    };
  }

  private word(word: string, at: number): void {
    const { section } = this;
    if (section.length === 0) {
      if (!word.startsWith("$")) {
        this.refuse("vcd-header", `"${word.slice(0, 40)}" where a keyword such as $var or $scope is due`, at);
        return;
      }
      if (word === "$end") return;
      this.sectionAt = at;
      section.push(word);
      return;
    }
    // A code may be the very word $end; it is one where a reference follows.
    const codeEnd = section[0] === "$var" && section.length === 3 && word === "$end";
    if (section[0] === "$var" && section.length === 4 && section[3] === "$end" && word.startsWith("$")) {
      this.refuse("vcd-var", "a $var without an identifier code and a name", this.sectionAt);
      return;
    }
    if (word !== "$end" || codeEnd) {
      const bounded = section[0] === "$var" || section[0] === "$scope" || section.length < 200;
      if (bounded) section.push(word);
      return;
    }
    this.section = [];
    this.close(section);
  }

  private close(section: readonly string[]): void {
    const [keyword, ...words] = section;
    if (KEPT.has(keyword) && words.length > 0) this.metadata.push([keyword.slice(1), words.join(" ").slice(0, REMARK)]);
    if (keyword === "$var") this.variable(words);
    else if (keyword === "$scope") this.scope(words);
    else if (keyword === "$upscope") this.scopes.pop();
    else if (keyword === "$timescale") this.timescale(words.join(""));
    else if (keyword === "$enddefinitions") this.done = true;
  }

  private scope(words: readonly string[]): void {
    if (words.length < 2)
      this.refuse("vcd-scope", `$scope with ${words.length === 0 ? "nothing" : "no name"} after it`, this.sectionAt);
    else this.scopes.push(plain(words.slice(1).join("")));
  }

  private timescale(text: string): void {
    const match = /^(\d+)([a-z]+)$/i.exec(text);
    const unit = match ? UNITS[match[2].toLowerCase()] : undefined;
    if (match === null || unit === undefined) {
      this.refuse(
        "vcd-timescale",
        `$timescale "${text.slice(0, 40)}", where 1, 10 or 100 and s, ms, us, ns, ps or fs are due`,
        this.sectionAt,
      );
      return;
    }
    const count = Number(match[1]);
    this.step = count > 0 ? { count, unit } : null;
  }

  private variable(words: readonly string[]): void {
    const [type, size, code, ...reference] = words;
    if (reference.length === 0) {
      this.refuse("vcd-var", `a $var of ${words.length} words, where type, size, code and name are due`, this.sectionAt);
      return;
    }
    const port = type === "port";
    const width = port ? portWidth(size) : Number(size);
    if (!Number.isInteger(width) || width < 0) {
      this.refuse("vcd-var", `a $var whose size is "${size.slice(0, 40)}", not a number`, this.sectionAt);
      return;
    }
    const { name, range } = referenceOf(reference, width);
    const ranged = range ?? (port ? rangeOf(size) : null);
    this.variables.push({ type, size: width, code, path: [...this.scopes, name].join("."), name, range: ranged, port });
  }

  private refuse(code: string, what: string, byte: number): void {
    this.problem ??= {
      code,
      message: `The VCD header has ${what} (byte ${byte}).`,
      advice: "Check that the file is a VCD (IEEE 1364-2005 clause 18) and is complete; export it again.",
      place: { byte },
    };
  }
}

const plain = (name: string) => (name.startsWith("\\") ? name.slice(1) : name);

function rangeOf(text: string): readonly [number, number] | null {
  const match = /^\[(-?\d+)(?::(-?\d+))?\]$/.exec(text);
  if (match === null) return null;
  return [Number(match[1]), Number(match[2] ?? match[1])];
}

/** A port's size is a number or a range. */
function portWidth(text: string): number {
  const range = rangeOf(text);
  return range ? Math.abs(range[0] - range[1]) + 1 : Number(text);
}

/**
 * "bus [1:0]", "v[3:0]", "nib[0] [3:0]", "pad [2]", "\odd.name[3]": the name, and the range where it is one. A single
 * index of a scalar stays part of the name: it names one bit that is dumped on its own.
 */
function referenceOf(words: readonly string[], size: number): { name: string; range: readonly [number, number] | null } {
  const escaped = words[0].startsWith("\\");
  const tail = words.slice(1).join("");
  if (escaped || tail !== "") {
    const range = rangeOf(tail);
    const whole = range !== null && (size > 1 || range[0] !== range[1]);
    return { name: plain(words[0]) + (whole ? "" : tail), range: whole ? range : null };
  }
  const at = words[0].lastIndexOf("[");
  const range = at > 0 ? rangeOf(words[0].slice(at)) : null;
  if (range === null || (size === 1 && range[0] === range[1])) return { name: words[0], range: null };
  return { name: words[0].slice(0, at), range };
}
