// In: raw bytes of a text file. Out: its encoding, strings of short parts, and chunks in which every ASCII character is
// one byte, so that a scanner need not know the encoding. Written here because the engine compiles without TextDecoder.
// Byte order marks: Unicode Standard 23.8. UTF-8 well-formedness: RFC 3629 section 4.

export type Encoding = "utf-8" | "latin-1" | "utf-16le" | "utf-16be";

export interface TextForm {
  readonly encoding: Encoding;
  /** Bytes of the byte order mark, 0 where there is none. */
  readonly mark: number;
}

/** Encoding of a file from its first bytes. Without a mark: UTF-16 where every other byte is NUL, else UTF-8 if valid. */
export function textForm(head: Uint8Array): TextForm {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { encoding: "utf-8", mark: 3 };
  if (head[0] === 0xff && head[1] === 0xfe) return { encoding: "utf-16le", mark: 2 };
  if (head[0] === 0xfe && head[1] === 0xff) return { encoding: "utf-16be", mark: 2 };
  let even = 0;
  let odd = 0;
  const pairs = Math.min(head.length, 1024) >> 1;
  for (let i = 0; i < pairs; i += 1) {
    if (head[2 * i] === 0) even += 1;
    if (head[2 * i + 1] === 0) odd += 1;
  }
  if (pairs > 0 && odd > pairs * 0.9 && even === 0) return { encoding: "utf-16le", mark: 0 };
  if (pairs > 0 && even > pairs * 0.9 && odd === 0) return { encoding: "utf-16be", mark: 0 };
  return { encoding: validUtf8(head) ? "utf-8" : "latin-1", mark: 0 };
}

/** A sequence cut off by the end of `bytes` counts as valid. */
function validUtf8(bytes: Uint8Array): boolean {
  let i = 0;
  while (i < bytes.length) {
    const lead = bytes[i];
    const extra =
      lead < 0x80 ? 0 : lead >= 0xc2 && lead < 0xe0 ? 1 : lead >= 0xe0 && lead < 0xf0 ? 2 : lead >= 0xf0 && lead < 0xf5 ? 3 : -1;
    if (extra < 0) return false;
    for (let k = 1; k <= extra && i + k < bytes.length; k += 1) {
      if ((bytes[i + k] & 0xc0) !== 0x80) return false;
    }
    i += extra + 1;
  }
  return true;
}

/** Text of bytes that `plainChunks` delivered (UTF-8 or Latin-1 by then). */
export function decode(bytes: Uint8Array, encoding: Encoding): string {
  const parts: string[] = [];
  const units: number[] = [];
  let i = 0;
  while (i < bytes.length) {
    const lead = bytes[i];
    if (lead < 0x80 || encoding === "latin-1") {
      units.push(lead);
      i += 1;
    } else {
      i += pushSequence(bytes, i, units);
    }
    if (units.length > 8192) {
      parts.push(String.fromCharCode(...units));
      units.length = 0;
    }
  }
  parts.push(String.fromCharCode(...units));
  return parts.join("");
}

/** Appends the UTF-16 units of the sequence at `i`; an ill-formed byte becomes U+FFFD. Returns the bytes used. */
function pushSequence(bytes: Uint8Array, i: number, units: number[]): number {
  const lead = bytes[i];
  const extra = lead >= 0xf0 ? 3 : lead >= 0xe0 ? 2 : lead >= 0xc2 ? 1 : 0;
  let point = lead & (0x3f >> extra);
  for (let k = 1; k <= extra; k += 1) {
    const next = bytes[i + k];
    if (next === undefined || (next & 0xc0) !== 0x80) return pushPoint(0xfffd, units, k);
    point = (point << 6) | (next & 0x3f);
  }
  return extra === 0 ? pushPoint(0xfffd, units, 1) : pushPoint(point, units, extra + 1);
}

function pushPoint(point: number, units: number[], used: number): number {
  if (point < 0x10000) units.push(point);
  else units.push(0xd800 + ((point - 0x10000) >> 10), 0xdc00 + ((point - 0x10000) & 0x3ff));
  return used;
}

/** The chunks without the mark, UTF-16 turned into UTF-8. Other encodings pass through uncopied. */
export async function* plainChunks(chunks: AsyncIterable<Uint8Array>, form: TextForm): AsyncGenerator<Uint8Array> {
  let skip = form.mark;
  const wide = form.encoding === "utf-16le" || form.encoding === "utf-16be";
  const narrower = new Narrower(form.encoding === "utf-16be");
  for await (const chunk of chunks) {
    const cut = Math.min(skip, chunk.length);
    skip -= cut;
    const rest = cut > 0 ? chunk.subarray(cut) : chunk;
    if (rest.length > 0) yield wide ? narrower.push(rest) : rest;
  }
}

/** Encoding of what `plainChunks` delivers. */
export function plainEncoding(form: TextForm): Encoding {
  return form.encoding === "latin-1" ? "latin-1" : "utf-8";
}

/** UTF-16 to UTF-8, one code unit at a time; a unit split by a chunk border waits. Surrogates become U+FFFD. */
class Narrower {
  private first = -1;
  constructor(private readonly big: boolean) {}

  push(bytes: Uint8Array): Uint8Array {
    const out = new Uint8Array(Math.ceil((bytes.length + 1) / 2) * 3);
    let length = 0;
    for (let i = 0; i < bytes.length; i += 1) {
      if (this.first < 0) {
        this.first = bytes[i];
        continue;
      }
      const unit = this.big ? (this.first << 8) | bytes[i] : (bytes[i] << 8) | this.first;
      this.first = -1;
      length = putUnit(out, length, unit >= 0xd800 && unit < 0xe000 ? 0xfffd : unit);
    }
    return out.subarray(0, length);
  }
}

function putUnit(out: Uint8Array, at: number, unit: number): number {
  if (unit < 0x80) {
    out[at] = unit;
    return at + 1;
  }
  if (unit < 0x800) {
    out[at] = 0xc0 | (unit >> 6);
    out[at + 1] = 0x80 | (unit & 0x3f);
    return at + 2;
  }
  out[at] = 0xe0 | (unit >> 12);
  out[at + 1] = 0x80 | ((unit >> 6) & 0x3f);
  out[at + 2] = 0x80 | (unit & 0x3f);
  return at + 3;
}
