// The browser's decode worker: glue alone. It opens what it is given, calls the analysis, and hands every block over to the
// page without a copy.

import { expose, transfer } from "comlink";
import { analyze } from "@/lib/diagnosis/analyze";
import { openCapture } from "@/lib/engine/samples/open";
import { previewCapture } from "@/lib/engine/samples/preview";
import { fileSource, host } from "./host";
import { buffersOf, type DecodeApi } from "./protocol";

const api: DecodeApi = {
  preview: (source, choices) => previewCapture(fileSource(source.blob, source.name), host, choices),
  async analyse(source, settings, listener) {
    const opened = await openCapture(fileSource(source.blob, source.name), host, settings.read);
    if (!opened.ok) return opened;
    const outcome = await analyze(opened.value, settings, {
      head: (head) => void listener.head(head),
      edges: (block) => void listener.edges(transfer(block, buffersOf(block, block.volts))),
      tap: (index, block) => void listener.tap(index, transfer(block, buffersOf(block))),
      transactions(block, bytes) {
        void listener.transactions(transfer(block, buffersOf(block)), transfer(bytes, buffersOf(bytes)));
      },
      progress: (bytes) => void listener.progress(bytes),
    });
    return outcome.ok ? transfer(outcome, buffersOf(outcome)) : outcome;
  },
};

expose(api);
