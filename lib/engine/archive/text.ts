// In: a string. Out: its UTF-8 bytes (RFC 3629), without TextEncoder, which the engine compiles without.

import { ByteWriter } from "./bytes";

export function utf8(text: string): Uint8Array<ArrayBuffer> {
  const out = new ByteWriter(text.length + 16);
  for (const character of text) {
    const point = character.codePointAt(0) ?? 0;
    out.reserve(4);
    if (point < 0x80) out.byte(point);
    else if (point < 0x800) {
      out.byte(0xc0 | (point >> 6));
      out.byte(0x80 | (point & 0x3f));
    } else if (point < 0x10000) {
      out.byte(0xe0 | (point >> 12));
      out.byte(0x80 | ((point >> 6) & 0x3f));
      out.byte(0x80 | (point & 0x3f));
    } else {
      out.byte(0xf0 | (point >> 18));
      out.byte(0x80 | ((point >> 12) & 0x3f));
      out.byte(0x80 | ((point >> 6) & 0x3f));
      out.byte(0x80 | (point & 0x3f));
    }
  }
  return out.bytes();
}
