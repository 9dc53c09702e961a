// The browser's archive worker: glue alone. It reads a picked file once more, with the choices that were confirmed, and packs
// its edges; on the page's own thread nothing waits for it.

import { expose } from "comlink";
import { recordArchive } from "@/lib/engine/archive/record";
import { openCapture } from "@/lib/engine/samples/open";
import { fileSource, host } from "./host";
import type { ArchiveApi } from "./protocol";

const api: ArchiveApi = {
  async archive(source, choices) {
    const opened = await openCapture(fileSource(source.blob, source.name), host, choices);
    return opened.ok ? recordArchive(opened.value, host) : opened;
  },
};

expose(api);
