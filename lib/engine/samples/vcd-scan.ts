// In: the value changes of a VCD, in chunks. Out: calls for the nets that somebody watches, and the end of each instant.
// IEEE 1364-2005 clause 18.3 with what simulators add: nine-value letters, string changes, port changes of an extended VCD.
// Works on bytes; words are complete before they are read, so the inner loops need no bounds.

import type { Problem } from "../../base/result";
import { type CodeTable, PRIME, unwatched } from "./vcd-codes";

/** Who is told. `net` is the number the code was registered with. */
export interface ChangeSink {
  /** One of 0 1 x z and the nine-value letters, as a character code. */
  scalar(net: number, value: number): void;
  /** Digits of a vector or the states of a port: bytes `from` to `to`. */
  vector(net: number, digits: Uint8Array, from: number, to: number, port: boolean): void;
  real(net: number, digits: Uint8Array, from: number, to: number): void;
  /** The instant `tick` is over: every watched change in it has been told. Only called where there was one. */
  settle(tick: number): void;
  /** Nothing is known from here on until it is told again ($dumpoff). */
  off(): void;
  /** The record was cut: times went back, and what follows does not join on. */
  cut(): void;
}

const BAD = 0;
const SCALAR = 1;
const KEYWORD = 3;
const VECTOR = 4;
const REAL = 5;
const STRING = 6;
const PORT = 7;

const KIND = new Uint8Array(256);
for (const c of "01xXzZuUwWlLhH-") KIND[c.charCodeAt(0)] = SCALAR;
KIND[36] = KEYWORD;
for (const [letters, kind] of [
  ["bB", VECTOR],
  ["rR", REAL],
  ["sS", STRING],
  ["p", PORT],
] as const) {
  for (const c of letters) KIND[c.charCodeAt(0)] = kind;
}

/** No word is longer; a longer one means that this is no VCD. */
const WORD = 16 * 1024 * 1024;
/** What is done while a section is open. */
const CHANGES = 0;
const SKIP = 1;

/** Feed chunks with `push`, then `finish`. After a problem nothing more is read. */
export class ChangeScanner {
  problem: Problem | null = null;
  /** The latest time, NaN before the first. */
  tick = Number.NaN;
  /** Value changes of all variables so far. */
  changes = 0;
  /** Words of the file that were set aside because time had gone back, and where that began. */
  asideChanges = 0;
  backwardsAt = -1;
  offCount = 0;
  /** The file ends inside a word, a change or a section. */
  truncated = false;
  /** First code that no $var declares (only told where all codes are registered), as a byte offset. */
  undeclaredAt = -1;
  /** Byte offset of the next byte. */
  at: number;

  private dirty = false;
  private aside = false;
  private state = CHANGES;
  /** A vector, real, string or port value whose code is still to come. */
  private pending = BAD;
  private skipWords = 0;
  private value: Uint8Array = new Uint8Array(0);
  private valueFrom = 0;
  private valueTo = 0;
  private carry: Uint8Array = new Uint8Array(0);
  private inBlock = false;

  constructor(
    private readonly table: CodeTable,
    private readonly sink: ChangeSink,
    at: number,
    private readonly all: boolean,
  ) {
    this.at = at;
  }

  push(chunk: Uint8Array): void {
    let from = 0;
    if (this.carry.length > 0) {
      while (from < chunk.length && chunk[from] > 32) from++;
      const joined = new Uint8Array(this.carry.length + from + 1);
      joined.set(this.carry);
      joined.set(chunk.subarray(0, from), this.carry.length);
      if (from === chunk.length) {
        this.carry = joined.subarray(0, joined.length - 1);
        if (this.carry.length > WORD) this.refuse("vcd-change", "a word of more than 16 MiB", this.at);
        return;
      }
      joined[joined.length - 1] = 32;
      const at = this.at;
      this.carry = new Uint8Array(0);
      this.scan(joined, 0, joined.length);
      this.at = at + joined.length - 1;
    }
    let to = chunk.length;
    while (to > from && chunk[to - 1] > 32) to--;
    const start = this.at;
    if (to > from && !this.problem) this.scan(chunk, from, to);
    this.at = start + (to - from);
    this.carry = chunk.slice(to);
  }

  finish(): void {
    if (this.problem) return;
    if (this.carry.length > 0) {
      const joined = new Uint8Array(this.carry.length + 1);
      joined.set(this.carry);
      joined[joined.length - 1] = 32;
      const before = this.asideChanges;
      const was = this.backwardsAt;
      this.scan(joined, 0, joined.length);
      // The last word may itself be cut short: one that makes no sense there is the cut, not a fault of the file.
      if (this.problem !== null || this.asideChanges > before) {
        this.problem = null;
        this.truncated = true;
        this.asideChanges = before;
        this.backwardsAt = was;
      }
    }
    if (this.pending !== BAD || this.skipWords > 0 || this.state === SKIP || this.inBlock) this.truncated = true;
    this.settle();
  }

  private settle(): void {
    if (this.dirty && !this.aside) {
      this.sink.settle(Number.isNaN(this.tick) ? 0 : this.tick);
      this.dirty = false;
    }
  }

  /** The hot loop: bytes `from` to `to` end in white space, so that no word needs its bound checked. */
  private scan(bytes: Uint8Array, from: number, to: number): void {
    const { table, sink, all } = this;
    const { first } = table;
    const start = this.at - from;
    let i = this.resume(bytes, from, to, start);
    let changes = 0;
    // Own copies of two fields: the loop runs once per word of the file.
    let { tick: latest, dirty } = this;
    let quiet = !dirty && !this.aside;
    while (i < to && this.problem === null) {
      const c = bytes[i];
      if (c <= 32) {
        i++;
      } else if (c === 35) {
        let j = i + 1;
        let tick = 0;
        for (let d = bytes[j] - 48; d >= 0 && d < 10; d = bytes[++j] - 48) tick = tick * 10 + d;
        if (quiet && tick > latest && bytes[j] <= 32 && j > i + 1) latest = tick;
        else {
          this.tick = latest;
          this.dirty = dirty;
          if (bytes[j] > 32 || j === i + 1) this.badTime(bytes, i, start);
          else this.advance(tick, start + i);
          latest = this.tick;
          dirty = this.dirty;
          quiet = !dirty && !this.aside;
        }
        i = j + 1;
      } else if (KIND[c] === SCALAR && first[bytes[i + 1]] === 0 && !all) {
        i += 2;
        while (bytes[i] > 32) i++;
        i++;
        changes++;
      } else if (KIND[c] === SCALAR) {
        let hash = 0;
        let j = i + 1;
        for (let d = bytes[j]; d > 32; d = bytes[++j]) hash = Math.imul(hash ^ d, PRIME);
        changes++;
        const net = table.find(bytes, i + 1, j, hash);
        if (net >= 0) {
          sink.scalar(net, c);
          dirty = true;
          quiet = false;
        } else if (all || j === i + 1) this.strange(c, j === i + 1, start + i);
        i = j + 1;
      } else {
        const after = c === 98 && !all ? unwatched(bytes, i, to, first) : 0;
        if (after > 0) {
          changes++;
          i = after;
          continue;
        }
        this.tick = latest;
        this.dirty = dirty;
        i = this.other(bytes, i, to, start);
        dirty = this.dirty;
        quiet = !dirty && !this.aside;
      }
    }
    this.tick = latest;
    this.dirty = dirty;
    this.changes += changes;
    if (this.pending !== BAD) {
      this.value = this.value.slice(this.valueFrom, this.valueTo);
      this.valueTo -= this.valueFrom;
      this.valueFrom = 0;
    }
  }

  /** Vectors, keywords and what should not be there. Returns the index after it. */
  private other(bytes: Uint8Array, i: number, to: number, start: number): number {
    const kind = KIND[bytes[i]];
    if (kind === KEYWORD) return this.resume(bytes, this.keyword(bytes, i), to, start);
    if (kind < VECTOR) {
      this.refuse("vcd-change", `"${word(bytes, i)}", which is neither a time, a value change nor a keyword`, start + i);
      return to;
    }
    let j = i + 1;
    while (bytes[j] > 32) j++;
    this.pending = kind;
    this.skipWords = kind === PORT ? 2 : 0;
    this.value = bytes;
    this.valueFrom = i + 1;
    this.valueTo = j;
    return this.resume(bytes, j, to, start);
  }

  /** Goes on with what is open, a value whose code is to come or a section to be left out, as far as the bytes reach. */
  private resume(bytes: Uint8Array, from: number, to: number, start: number): number {
    let i = from;
    while (i < to && (this.pending !== BAD || this.state === SKIP) && this.problem === null) {
      if (bytes[i] <= 32) i++;
      else i = this.continued(bytes, i, start);
    }
    return i;
  }

  private strange(value: number, alone: boolean, byte: number): void {
    if (alone)
      this.refuse("vcd-change", `the value ${String.fromCharCode(value)} with no identifier code directly after it`, byte);
    else this.undeclared(byte);
  }

  /** A word that belongs to something begun before it: a vector's code, a section's text. Returns the index after it. */
  private continued(bytes: Uint8Array, i: number, start: number): number {
    let hash = 0;
    let j = i;
    for (let d = bytes[j]; d > 32; d = bytes[++j]) hash = Math.imul(hash ^ d, PRIME);
    if (this.state === SKIP) {
      if (j - i === 4 && bytes[i] === 36 && bytes[i + 1] === 101 && bytes[i + 2] === 110 && bytes[i + 3] === 100)
        this.state = CHANGES;
      return j;
    }
    if (this.skipWords > 0) {
      this.skipWords--;
      return j;
    }
    const net = this.table.find(bytes, i, j, hash);
    const kind = this.pending;
    this.pending = BAD;
    this.changes++;
    if (net < 0) {
      if (this.all) this.undeclared(start + i);
      return j;
    }
    this.dirty = true;
    if (kind === REAL) this.sink.real(net, this.value, this.valueFrom, this.valueTo);
    else if (kind !== STRING) {
      const bad = this.badDigit(kind === PORT);
      if (bad >= 0) this.refuse("vcd-change", `a vector with the digit "${String.fromCharCode(bad)}"`, start + i);
      else this.sink.vector(net, this.value, this.valueFrom, this.valueTo, kind === PORT);
    }
    return j;
  }

  private badDigit(port: boolean): number {
    if (this.valueTo === this.valueFrom) return 32;
    if (port) return -1;
    for (let k = this.valueFrom; k < this.valueTo; k++) if (KIND[this.value[k]] !== SCALAR) return this.value[k];
    return -1;
  }

  private badTime(bytes: Uint8Array, i: number, start: number): void {
    this.refuse("vcd-time", `"${word(bytes, i)}" where a time, # and a whole number, is due`, start + i);
  }

  private advance(tick: number, byte: number): void {
    this.inBlock = false;
    if (tick > this.tick) {
      this.settle();
      this.tick = tick;
      this.aside = false;
    } else if (tick < this.tick && !this.aside) {
      this.settle();
      this.aside = true;
      if (this.backwardsAt < 0) this.backwardsAt = byte;
      this.sink.cut();
    } else if (Number.isNaN(this.tick)) {
      // Values told before the first time stand at 0.
      if (tick > 0) this.settle();
      this.tick = tick;
    }
    if (this.aside) this.asideChanges++;
  }

  private keyword(bytes: Uint8Array, i: number): number {
    const name = word(bytes, i);
    if (name === "$end") this.inBlock = false;
    else if (name === "$dumpoff" || name === "$dumpportsoff") {
      this.offCount++;
      this.dirty = true;
      this.sink.off();
      this.inBlock = true;
    } else if (name.startsWith("$dump")) this.inBlock = true;
    // The time after it is the last one, and is read as any other.
    else if (name !== "$vcdclose") this.state = SKIP;
    let j = i;
    while (bytes[j] > 32) j++;
    return j;
  }

  private undeclared(byte: number): void {
    if (this.undeclaredAt < 0) this.undeclaredAt = byte;
  }

  private refuse(code: string, what: string, byte: number): void {
    this.problem ??= {
      code,
      message: `The VCD has ${what} (byte ${byte}).`,
      advice: "The file is damaged there, or is not a VCD (IEEE 1364-2005 clause 18); export it again.",
      place: { byte },
    };
  }
}

function word(bytes: Uint8Array, from: number): string {
  let text = "";
  for (let i = from; i < bytes.length && bytes[i] > 32 && text.length < 40; i++) {
    text += bytes[i] < 127 ? String.fromCharCode(bytes[i]) : `\\x${bytes[i].toString(16)}`;
  }
  return text;
}
