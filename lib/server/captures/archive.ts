import "server-only";
import { createArchiveWriter } from "@/lib/engine/archive/writer";
import type { CaptureTail, OpenCapture } from "@/lib/engine/samples/reader";
import { host } from "./host";

/** A capture that writes its edge archive while it is read. */
export interface Archiving {
  readonly capture: OpenCapture;
  /** The archive, once the capture was read to its end. */
  finish(): Promise<Uint8Array>;
}

/** The same capture; whoever reads it makes the archive by the way, so that nothing is read twice. */
export function archiving(opened: OpenCapture): Archiving {
  const writer = createArchiveWriter(opened.head, host.deflate);
  let tail: CaptureTail | undefined;
  return {
    capture: {
      head: opened.head,
      async read(sink) {
        const outcome = await opened.read({
          passing: sink.passing,
          edges(block) {
            writer.edges(block);
            sink.edges(block);
          },
          tap(index, block) {
            writer.tap(index, block);
            sink.tap(index, block);
          },
          progress: (bytes) => sink.progress(bytes),
        });
        if (outcome.ok) tail = outcome.value;
        return outcome;
      },
    },
    async finish() {
      if (tail === undefined) throw new Error("the capture was not read to its end");
      return Buffer.concat(await writer.finish(tail));
    },
  };
}
