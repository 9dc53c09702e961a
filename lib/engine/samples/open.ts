// In: any file, compressed or not, and the person's choices. Out: the opened capture of the reader it belongs to.

import { ok, type Result } from "../../base/result";
import { firstBytes, inflated, isGzip } from "../bytes/gzip";
import type { ByteSource, Host } from "../bytes/source";
import { openCsv } from "./csv";
import type { Opened, ReadChoices } from "./reader";
import { type Format, sniff } from "./sniff";
import { openVcd } from "./vcd";

/** Bytes by which the format is judged. */
const SNIFF_BYTES = 16_384;

export interface Recognised {
  readonly format: Format;
  readonly gzip: boolean;
  /** Delivers the inflated bytes. */
  readonly source: ByteSource;
}

/** Unwraps gzip and says which reader the file belongs to. */
export async function recognise(source: ByteSource, host: Host): Promise<Result<Recognised>> {
  const stored = await firstBytes(source, 16);
  if (!stored.ok) return stored;
  const gzip = isGzip(stored.value);
  const plain = gzip ? inflated(source, host) : source;
  const head = await firstBytes(plain, SNIFF_BYTES);
  if (!head.ok) return head;
  const format = sniff(head.value, source.name);
  return format.ok ? ok({ format: format.value, gzip, source: plain }) : format;
}

export async function openCapture(source: ByteSource, host: Host, choices: ReadChoices): Promise<Opened> {
  const found = await recognise(source, host);
  if (!found.ok) return found;
  const { format, gzip, source: plain } = found.value;
  return format === "csv" ? openCsv(plain, choices, gzip) : openVcd(plain, choices, gzip);
}
