import { recordArchive } from "@/lib/engine/archive/record";
import type { ByteSource } from "@/lib/engine/bytes/source";
import { openCapture } from "@/lib/engine/samples/open";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { host } from "@/workers/host";

function memory(name: string, bytes: Uint8Array): ByteSource {
  return {
    name,
    size: bytes.length,
    async *open() {
      yield bytes;
    },
  };
}

/** The edge archive of a file, made as the browser's worker makes it. */
export async function archiveOf(name: string, bytes: Uint8Array, choices: ReadChoices = {}): Promise<Uint8Array> {
  const opened = await openCapture(memory(name, bytes), host, choices);
  if (!opened.ok) throw new Error(opened.problem.message);
  const packed = await recordArchive(opened.value, host);
  if (!packed.ok) throw new Error(packed.problem.message);
  return packed.value;
}
