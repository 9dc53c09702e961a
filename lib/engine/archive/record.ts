// In: an opened capture. Out: its edge archive as one array, read through once.

import { ok, type Result } from "../../base/result";
import type { Host } from "../bytes/source";
import type { OpenCapture } from "../samples/reader";
import { createArchiveWriter } from "./writer";

export async function recordArchive(capture: OpenCapture, host: Host): Promise<Result<Uint8Array<ArrayBuffer>>> {
  const writer = createArchiveWriter(capture.head, host.deflate);
  const tail = await capture.read({ edges: writer.edges, tap: writer.tap, progress: () => undefined });
  if (!tail.ok) return tail;
  const parts = await writer.finish(tail.value);
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return ok(whole);
}
