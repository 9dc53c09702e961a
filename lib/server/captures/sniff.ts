import "server-only";
import { constants, gunzipSync } from "node:zlib";

/** Bytes of the beginning that are looked at. */
export const HEAD = 64 * 1024;

/** What the beginning of a file shows it to be, or why it is none of these. */
export type Sniffed =
  | { readonly ok: true; readonly type: "csv" | "vcd"; readonly gzip: boolean }
  | { readonly ok: false; readonly why: string };

/** Signatures of files people drop by mistake; published magic numbers (from memory of file(1)'s list). */
const strangers: readonly { readonly bytes: readonly number[]; readonly what: string }[] = [
  { bytes: [0x50, 0x4b, 0x03, 0x04], what: "a ZIP archive (or an office document). Unpack it and upload the CSV or VCD inside" },
  { bytes: [0x89, 0x50, 0x4e, 0x47], what: "a PNG picture. Export the trace as CSV or VCD instead of a screenshot" },
  { bytes: [0xff, 0xd8, 0xff], what: "a JPEG picture. Export the trace as CSV or VCD instead of a photograph" },
  { bytes: [0x25, 0x50, 0x44, 0x46], what: "a PDF document" },
  { bytes: [0x7f, 0x45, 0x4c, 0x46], what: "a program" },
];

/** Decides by the first bytes only; whether the rest can be decoded is the reader's question, not this one's. */
export function sniff(head: Uint8Array): Sniffed {
  if (head.length >= 2 && head[0] === 0x1f && head[1] === 0x8b) {
    const inside = inflated(head);
    if (inside === null) return { ok: false, why: "It begins like a gzip file but cannot be unpacked." };
    const found = plain(inside);
    return found.ok ? { ...found, gzip: true } : found;
  }
  return plain(head);
}

/** What a truncated gzip head unpacks to; DEFLATE expands at most 1032 times, so this stays below 66 MiB. */
function inflated(head: Uint8Array): Uint8Array | null {
  try {
    return gunzipSync(head, { finishFlush: constants.Z_SYNC_FLUSH }).subarray(0, HEAD);
  } catch {
    return null;
  }
}

function plain(head: Uint8Array): Sniffed {
  const stranger = strangers.find(({ bytes }) => bytes.every((byte, at) => head[at] === byte));
  if (stranger) return { ok: false, why: `It is ${stranger.what}.` };
  const words = decoded(head);
  const odd = (words.match(/[^\t\n\v\f\r\P{Cc}]|\ufffd/gu) ?? []).length;
  // A few are forgiven: degree and micro signs in an old code page are not valid UTF-8.
  if (odd > words.length / 50) return { ok: false, why: "It is not a text file, so neither CSV nor VCD." };
  if (/^\s*\$[a-z]+\s/.test(words)) return { ok: true, type: "vcd", gzip: false };
  if (!/\d/.test(words)) return { ok: false, why: "Its beginning holds no number, so it is no table of samples." };
  return { ok: true, type: "csv", gzip: false };
}

function decoded(head: Uint8Array): string {
  const wide = head[0] === 0xff && head[1] === 0xfe ? "utf-16le" : "utf-8";
  return new TextDecoder(wide).decode(head);
}
