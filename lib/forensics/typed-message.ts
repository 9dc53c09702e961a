// In: a message as a person types it: "0x50 W 01 3C", "0x48 R 2", "0x50 W 01 Sr 0x50 R", or its bytes "A0 01 3C". Out: what its
// controller intends slot by slot, or what is wrong with it. Addresses are written 0x50 (7-bit) or 0x250 (10-bit, three digits).

import { ok, type Problem, type Result, refuse } from "../base/result";
import { intentOf, type MessageByte, type MessagePart, type Slot } from "./intent";

/** Bytes a typed message may have. */
export const TYPED_BYTES = 256;
const HELP =
  "Write address, direction and bytes, such as 0x50 W 01 3C; after R how many bytes are read, such as 0x48 R 2; or all bytes, such as A0 01 3C.";

export interface TypedMessage {
  readonly intent: readonly Slot[];
  /** Ends in "...": more follows that nobody typed. */
  readonly openEnded: boolean;
}

interface Part {
  readonly bytes: MessageByte[];
  /** Of a read whose length was not said. */
  readonly endless: boolean;
}

export function readTyped(text: string): Result<TypedMessage> {
  const words = text.split(/[\s,]+/).filter((word) => word !== "");
  if (/^s$/i.test(words[0] ?? "")) words.shift();
  if (/^p$/i.test(words.at(-1) ?? "")) words.pop();
  const openEnded = /^(\.\.\.|…)$/.test(words.at(-1) ?? "");
  if (openEnded) words.pop();
  if (words.length === 0) return refuse(bad("There is no message yet."));
  const parts: Part[] = [];
  for (const group of groupsOf(words)) {
    const read = partsOf(group);
    if (!read.ok) return read;
    parts.push(...read.value);
  }
  const total = parts.reduce((sum, part) => sum + part.bytes.length, 0);
  if (total > TYPED_BYTES) return refuse(bad(`The message has ${total} bytes; at most ${TYPED_BYTES} are compared.`));
  const loose = parts.findIndex((part) => part.endless);
  if (loose >= 0 && loose < parts.length - 1)
    return refuse(bad("A read in the middle needs to say how many bytes it reads, such as R 2."));
  const open = openEnded || loose >= 0;
  const message = parts.map(
    ({ bytes }, k): MessagePart => ({ bytes, closes: k < parts.length - 1 ? "Sr" : open ? "none" : "P" }),
  );
  return ok({ intent: intentOf(message), openEnded: open });
}

/** Split at the repeated STARTs. */
function groupsOf(words: readonly string[]): string[][] {
  const groups: string[][] = [[]];
  for (const word of words) {
    if (/^sr$/i.test(word)) groups.push([]);
    else groups[groups.length - 1].push(word);
  }
  return groups;
}

function partsOf(words: readonly string[]): Result<Part[]> {
  const [first, second = ""] = words;
  if (first === undefined) return refuse(bad("Nothing follows the Sr, or nothing stands before it."));
  if (/^[rw]$/i.test(first)) return refuse(bad(`"${first}" needs an address before it.`));
  if (/^[rw]$/i.test(second)) return addressed(first, second.toUpperCase(), words.slice(2));
  if (/^0x/i.test(first)) return refuse(bad(`After the address ${first} stands neither W nor R.`));
  return inBytes(words);
}

function addressed(word: string, direction: string, rest: readonly string[]): Result<Part[]> {
  const digits = word.replace(/^0x/i, "");
  if (!/^[0-9a-f]{1,3}$/i.test(digits)) return refuse(bad(`"${word}" is no address.`));
  const value = Number.parseInt(digits, 16);
  if (digits.length === 3) {
    if (value > 0x3ff) return refuse(bad(`${word} is above 0x3FF, the last 10-bit address.`));
    return tenBit(value, direction, rest);
  }
  if (value > 0x7f) {
    const seven = `0x${(value >> 1).toString(16).toUpperCase().padStart(2, "0")}`;
    return refuse(bad(`${word} is above 0x7F. Is it the address byte of ${seven}? Then write ${seven} ${direction}.`));
  }
  if (direction === "W") return withData([(value << 1) & 0xfe], rest);
  return withReads((value << 1) | 1, [], rest);
}

/** UM10204 3.1.11: 11110 and two bits of the address, then the other eight; a read repeats the first byte after Sr. */
function tenBit(value: number, direction: string, rest: readonly string[]): Result<Part[]> {
  const first = 0xf0 | ((value >> 7) & 0x06);
  const written = withData([first, value & 0xff], direction === "W" ? rest : []);
  if (direction === "W" || !written.ok) return written;
  return withReads(first | 1, written.value, rest);
}

function withData(address: readonly number[], words: readonly string[]): Result<Part[]> {
  const values: number[] = [...address];
  for (const word of words) {
    const value = byteOf(word);
    if (value === null) return refuse(bad(`"${word}" is no byte in hexadecimal.`));
    values.push(value);
  }
  return ok([{ bytes: values.map(whole), endless: false }]);
}

function withReads(address: number, before: readonly Part[], words: readonly string[]): Result<Part[]> {
  if (words.length > 1)
    return refuse(bad("After R only the number of bytes read is written: their values are the target's own."));
  if (words.length === 0) return ok([...before, { bytes: [whole(address), { value: 0, bits: 8, ack: null }], endless: true }]);
  const count = /^\d{1,3}$/.test(words[0]) ? Number(words[0]) : 0;
  if (count < 1) return refuse(bad(`"${words[0]}" is no number of bytes to read.`));
  return ok([...before, { bytes: reads(address, count), endless: false }]);
}

function reads(address: number, count: number): MessageByte[] {
  // The last byte of a read is not acknowledged (3.1.6).
  return [whole(address), ...Array.from({ length: count }, (_, k) => ({ value: 0, bits: 8, ack: k < count - 1 }))];
}

/** All bytes, the address byte first. Of a read only how many there are matters. */
function inBytes(words: readonly string[]): Result<Part[]> {
  const values: number[] = [];
  for (const word of words) {
    const value = byteOf(word);
    if (value === null) return refuse(bad(`"${word}" is no byte in hexadecimal.`));
    values.push(value);
  }
  const [first] = values;
  if ((first & 1) === 0) return ok([{ bytes: values.map(whole), endless: false }]);
  return values.length === 1 ? withReads(first, [], []) : ok([{ bytes: reads(first, values.length - 1), endless: false }]);
}

function byteOf(word: string): number | null {
  return /^(0x)?[0-9a-f]{1,2}$/i.test(word) ? Number.parseInt(word.replace(/^0x/i, ""), 16) : null;
}

function whole(value: number): MessageByte {
  return { value, bits: 8, ack: true };
}

function bad(message: string): Problem {
  return { code: "bad-message", message, advice: HELP, place: {} };
}
