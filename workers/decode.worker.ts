// The browser's decode worker: glue alone. It opens what it is given, calls the analysis, and hands every block of edges over
// to the page without a copy.

import { expose, transfer } from "comlink";
import { analyze } from "@/lib/diagnosis/analyze";
import { openArchive } from "@/lib/engine/archive/reader";
import { openCapture } from "@/lib/engine/samples/open";
import { previewCapture } from "@/lib/engine/samples/preview";
import { fileSource, host } from "./host";
import { buffersOf, type DecodeApi } from "./protocol";
import { warmUp } from "./warm-up";

/** The page is told how far the reading is at most so often. */
const PROGRESS_MS = 50;
let wanted = false;

const api: DecodeApi = {
  warmUp: () => warmUp(() => wanted),
  preview(source, choices) {
    wanted = true;
    return previewCapture(fileSource(source.blob, source.name), host, choices);
  },
  async analyse(source, settings, listener) {
    wanted = true;
    const bytes = fileSource(source.blob, source.name);
    const opened = await (source.kind === "archive" ? openArchive(bytes, host) : openCapture(bytes, host, settings.read));
    if (!opened.ok) return opened;
    let told: unknown;
    const tell = (receipt: unknown) => {
      told = receipt;
    };
    let last = performance.now();
    const outcome = await analyze(opened.value, settings, {
      head: (head) => void listener.head(head),
      edges: (block) => tell(listener.edges(transfer(block, buffersOf(block, block.volts)))),
      tap: (index, block) => tell(listener.tap(index, transfer(block, buffersOf(block)))),
      // Copied: the analysis itself goes on reading its transactions until it has concluded. They are few beside the edges.
      transactions: (block, rows) => tell(listener.transactions(block, rows)),
      progress(read) {
        const now = performance.now();
        if (now - last < PROGRESS_MS) return;
        last = now;
        void listener.progress(read);
      },
    });
    // The answer travels by another port than the blocks and could overtake them; the last block's receipt comes after them all.
    await told;
    return outcome.ok ? transfer(outcome, buffersOf(outcome)) : outcome;
  },
};

expose(api);
