// In: bytes as they pass. Out: the digests that S3 clients send along, to compare.

import { createHash } from "node:crypto";
import { crc32 } from "node:zlib";
import { StorageError } from "./storage-error";

export const CHECKSUMS = ["crc32", "crc32c", "sha1", "sha256"] as const;
export type ChecksumName = (typeof CHECKSUMS)[number];

export interface Checksum {
  readonly name: ChecksumName;
  /** base64, as in the header x-amz-checksum-NAME. */
  readonly value: string;
}

export interface Digest {
  update(bytes: Buffer): void;
  /** base64 */
  value(): string;
}

export function startDigest(name: ChecksumName): Digest {
  if (name === "crc32") return startCrc(crc32);
  if (name === "crc32c") return startCrc(crc32c);
  const hash = createHash(name);
  return { update: (bytes) => void hash.update(bytes), value: () => hash.digest("base64") };
}

function startCrc(step: (bytes: Buffer, before: number) => number): Digest {
  let sum = 0;
  return {
    update: (bytes) => {
      sum = step(bytes, sum);
    },
    value: () => {
      const out = Buffer.alloc(4);
      out.writeUInt32BE(sum >>> 0);
      return out.toString("base64");
    },
  };
}

// CRC-32C (Castagnoli), reversed polynomial 0x82F63B78: RFC 3720 section 12.1.
const TABLE = Uint32Array.from({ length: 256 }, (_unused, index) => {
  let sum = index;
  for (let bit = 0; bit < 8; bit += 1) sum = sum & 1 ? (sum >>> 1) ^ 0x82f63b78 : sum >>> 1;
  return sum;
});

function crc32c(bytes: Buffer, before: number): number {
  let sum = ~before;
  for (const byte of bytes) sum = TABLE[(sum ^ byte) & 255] ^ (sum >>> 8);
  return ~sum >>> 0;
}

/** The checksum kind that a header or a trailer names; the fake refuses what it cannot check. */
export function checksumKind(header: string): ChecksumName | undefined {
  const word = /^x-amz-checksum-(.+)$/.exec(header)?.[1];
  if (word === undefined || word === "algorithm" || word === "type" || word === "mode") return undefined;
  const known = CHECKSUMS.find((name) => name === word);
  if (!known) throw new StorageError("NotImplemented", `Checksums of kind ${word} are not checked here.`);
  return known;
}
