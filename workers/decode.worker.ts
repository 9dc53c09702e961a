// The browser's decode worker: glue alone. It opens what it is given, calls the analysis, and hands every block of edges over
// to the page without a copy.

import { expose, transfer } from "comlink";
import { analyze } from "@/lib/diagnosis/analyze";
import { openArchive } from "@/lib/engine/archive/reader";
import { openCapture } from "@/lib/engine/samples/open";
import { previewCapture } from "@/lib/engine/samples/preview";
import { fileSource, host } from "./host";
import { buffersOf, type DecodeApi } from "./protocol";

const api: DecodeApi = {
  preview: (source, choices) => previewCapture(fileSource(source.blob, source.name), host, choices),
  async analyse(source, settings, listener) {
    const bytes = fileSource(source.blob, source.name);
    const opened = await (source.kind === "archive" ? openArchive(bytes, host) : openCapture(bytes, host, settings.read));
    if (!opened.ok) return opened;
    const outcome = await analyze(opened.value, settings, {
      head: (head) => void listener.head(head),
      edges: (block) => void listener.edges(transfer(block, buffersOf(block, block.volts))),
      tap: (index, block) => void listener.tap(index, transfer(block, buffersOf(block))),
      // Copied: the analysis itself goes on reading its transactions until it has concluded. They are few beside the edges.
      transactions: (block, bytes) => void listener.transactions(block, bytes),
      progress: (bytes) => void listener.progress(bytes),
    });
    return outcome.ok ? transfer(outcome, buffersOf(outcome)) : outcome;
  },
};

expose(api);
