// In: whatever holds the file (a picked File, a path, a download). Out: its bytes, as often as they are asked for.
// The engine knows neither DOM nor Node, so the host hands it this.

/** A file that can be read from the start more than once. */
export interface ByteSource {
  /** The file's name, for messages. */
  readonly name: string;
  /** Size in bytes as stored (compressed size for gzip), or null where unknown. */
  readonly size: number | null;
  /** Reads from the start. Chunks may be of any length and are not kept by the caller after the next one is asked for. */
  open(): AsyncIterable<Uint8Array>;
  /** Stored bytes consumed by the latest `open`, where that differs from the bytes delivered (gzip); readers report it as progress. */
  consumed?(): number;
}

/** What the engine needs of its host and may not bring itself. */
export interface Host {
  /** Decompresses one gzip stream (all its members). Rejects with an Error on corrupt or truncated data. */
  inflate(chunks: AsyncIterable<Uint8Array>): AsyncIterable<Uint8Array>;
  /** Compresses into one gzip stream. */
  deflate(chunks: AsyncIterable<Uint8Array>): AsyncIterable<Uint8Array>;
}
