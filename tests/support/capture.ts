import { createArchiveWriter } from "@/lib/engine/archive/writer";
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
  const writer = createArchiveWriter(opened.value.head, host.deflate);
  const tail = await opened.value.read({
    edges: (block) => writer.edges(block),
    tap: (index, block) => writer.tap(index, block),
    progress() {},
  });
  if (!tail.ok) throw new Error(tail.problem.message);
  return Buffer.concat(await writer.finish(tail.value));
}
