import "server-only";
import type { ByteSource } from "@/lib/engine/bytes/source";
import { store } from "./store";

/** A stored file as the engine's byte source. */
export function storedSource(key: string, name: string, size: number): ByteSource {
  return { name, size, open: () => bytesOf(key) };
}

async function* bytesOf(key: string): AsyncGenerator<Uint8Array> {
  yield* await store().open(key);
}
