import "server-only";
import { createHash } from "node:crypto";
import type { z } from "zod";
import type { StoreAnalysisSchema } from "@/lib/case/upload";
import { Refusal } from "@/lib/server/http/problem";

/** Refuses an archive that is not the bytes announced. */
export async function checkArchive(
  bytes: AsyncIterable<Uint8Array>,
  { archive }: z.output<typeof StoreAnalysisSchema>,
): Promise<void> {
  const hash = createHash("sha256");
  let size = 0;
  for await (const chunk of bytes) {
    hash.update(chunk);
    size += chunk.length;
  }
  if (size !== archive.size || hash.digest("hex") !== archive.sha256) {
    throw new Refusal("upload-mismatch", { words: "The archive in storage is not the one that was announced. Send it again." });
  }
}
