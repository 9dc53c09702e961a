// In: the first bytes of an inflated file. Out: which reader it belongs to, or why it belongs to none.

import { ok, type Problem, type Result, refuse } from "../../base/result";
import { decode, plainEncoding, textForm } from "../bytes/text";

export type Format = "csv" | "vcd";

interface Signature {
  readonly bytes: readonly number[];
  readonly code: string;
  readonly what: string;
  readonly advice: string;
}

const EXPORT_ADVICE = "Export the sampled channels as CSV or VCD and give that file.";
const ascii = (text: string) => [...text].map((letter) => letter.charCodeAt(0));

/** Leading bytes of files that people pick by mistake. */
const SIGNATURES: readonly Signature[] = [
  { bytes: ascii("%PDF"), code: "pdf-file", what: "a PDF document", advice: EXPORT_ADVICE },
  {
    bytes: [0x89, ...ascii("PNG")],
    code: "image-file",
    what: "a PNG picture",
    advice: "A screenshot holds no samples. Export the trace itself as CSV or VCD.",
  },
  {
    bytes: [0xff, 0xd8, 0xff],
    code: "image-file",
    what: "a JPEG picture",
    advice: "A screenshot holds no samples. Export the trace itself as CSV or VCD.",
  },
  {
    bytes: ascii("GIF8"),
    code: "image-file",
    what: "a GIF picture",
    advice: "A screenshot holds no samples. Export the trace itself as CSV or VCD.",
  },
  {
    bytes: ascii("BM"),
    code: "image-file",
    what: "a BMP picture",
    advice: "A screenshot holds no samples. Export the trace itself as CSV or VCD.",
  },
  {
    bytes: [0xd0, 0xcf, 0x11, 0xe0],
    code: "spreadsheet-file",
    what: "an old spreadsheet or document",
    advice: "Save the sheet as CSV and give that file.",
  },
  { bytes: ascii("BZh"), code: "compressed-file", what: "compressed with bzip2", advice: "Unpack it, or compress it with gzip." },
  {
    bytes: [0xfd, ...ascii("7zXZ")],
    code: "compressed-file",
    what: "compressed with xz",
    advice: "Unpack it, or compress it with gzip.",
  },
  {
    bytes: [0x28, 0xb5, 0x2f, 0xfd],
    code: "compressed-file",
    what: "compressed with zstd",
    advice: "Unpack it, or compress it with gzip.",
  },
  {
    bytes: [0x37, 0x7a, 0xbc, 0xaf],
    code: "compressed-file",
    what: "a 7z archive",
    advice: "Unpack it and give the CSV or VCD inside.",
  },
  { bytes: ascii("Rar!"), code: "compressed-file", what: "a RAR archive", advice: "Unpack it and give the CSV or VCD inside." },
  { bytes: [0x7f, ...ascii("ELF")], code: "binary-file", what: "a program", advice: EXPORT_ADVICE },
];

export function sniff(head: Uint8Array, name: string): Result<Format> {
  if (head.length === 0)
    return refuse(
      problem(
        "empty-file",
        `${name} is empty: it has 0 bytes.`,
        "Export the capture again; the copy may have been interrupted.",
        0,
      ),
    );
  const binary = binaryProblem(head, name);
  if (binary !== null) return refuse(binary);
  const form = textForm(head);
  const text = form.encoding.startsWith("utf-16")
    ? wideText(head, form.encoding === "utf-16be")
    : decode(head.subarray(form.mark), plainEncoding(form));
  const start = text.trimStart();
  if (start === "")
    return refuse(
      problem(
        "empty-file",
        `${name} holds only blank lines.`,
        "Export the capture again; the copy may have been interrupted.",
        0,
      ),
    );
  if (/^\$(?:comment|date|version|timescale|scope|var|upscope|enddefinitions|attrbegin)\b/.test(start)) return ok("vcd");
  const other = otherText(start, name);
  return other === null ? ok("csv") : refuse(other);
}

function problem(code: string, message: string, advice: string, byte: number): Problem {
  return { code, message, advice, place: { byte } };
}

function binaryProblem(head: Uint8Array, name: string): Problem | null {
  if (startsWith(head, ascii("PK\u0003\u0004"))) return zipProblem(head, name);
  for (const signature of SIGNATURES) {
    if (!startsWith(head, signature.bytes)) continue;
    // "BM" may also begin a line of text.
    if (signature.bytes.length === 2 && head.indexOf(0) < 0) continue;
    return problem(signature.code, `${name} is ${signature.what}, not a capture (byte 0).`, signature.advice, 0);
  }
  if (textForm(head).encoding.startsWith("utf-16")) return null;
  for (let i = 0; i < head.length; i += 1) {
    const byte = head[i];
    if (byte === 0 || (byte < 32 && byte !== 9 && byte !== 10 && byte !== 13 && byte !== 12 && byte !== 26)) {
      const shown = byte.toString(16).toUpperCase().padStart(2, "0");
      return problem(
        "binary-file",
        `${name} is a binary file: byte ${i} is ${shown} hex, which no CSV or VCD holds.`,
        EXPORT_ADVICE,
        i,
      );
    }
  }
  return null;
}

function startsWith(head: Uint8Array, bytes: readonly number[]): boolean {
  return bytes.every((byte, i) => head[i] === byte);
}

function zipProblem(head: Uint8Array, name: string): Problem {
  const names = decode(head.subarray(0, 4096), "latin-1");
  if (/xl\/|\[Content_Types\]|mimetypeapplication\/vnd\.oasis/.test(names)) {
    return problem(
      "spreadsheet-file",
      `${name} is a spreadsheet workbook, not a CSV (byte 0).`,
      "Save the sheet as CSV and give that file.",
      0,
    );
  }
  return problem(
    "zip-file",
    `${name} is a ZIP archive (byte 0).`,
    "Unpack it and give the CSV or VCD inside; gzip is read as it is.",
    0,
  );
}

function wideText(head: Uint8Array, big: boolean): string {
  let text = "";
  for (let i = 0; i + 1 < Math.min(head.length, 4096); i += 2)
    text += String.fromCharCode(big ? (head[i] << 8) | head[i + 1] : (head[i + 1] << 8) | head[i]);
  return text.replace(/^\ufeff/, "");
}

function otherText(start: string, name: string): Problem | null {
  if (/^<(?:!doctype html|html)/i.test(start)) {
    return problem(
      "html-file",
      `${name} is a web page, not a capture (byte 0).`,
      "A download may have saved the sign-in page instead of the file. Download it again.",
      0,
    );
  }
  if (/^<\?xml|^<[a-z]+[\s>]/i.test(start))
    return problem("xml-file", `${name} is XML, not a capture (byte 0).`, EXPORT_ADVICE, 0);
  if (/^\{\s*(?:"|\})|^\[\s*(?:[{["\]]|-?\d+(?:\.\d+)?\s*[,\]])/.test(start))
    return problem("json-file", `${name} is JSON, not a capture (byte 0).`, EXPORT_ADVICE, 0);
  return null;
}
