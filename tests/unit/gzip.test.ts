// gzip files of several members (RFC 1952 2.2: "members simply appear one after another in the file"), cut anywhere.

import { gzipSync } from "node:zlib";
import { describe, expect, test } from "vitest";
import { host } from "../../workers/host";
import { DEMO, readText, sampled, traffic } from "../support/csv";

async function inflate(bytes: Uint8Array, size: number): Promise<Buffer> {
  async function* chunks() {
    for (let from = 0; from < bytes.length; from += size) yield bytes.subarray(from, from + size);
  }
  const parts: Uint8Array[] = [];
  for await (const part of host.inflate(chunks())) parts.push(part.slice());
  return Buffer.concat(parts);
}

/** Text that does not repeat, so that its compressed form is long. */
function noise(length: number, seed: number): Buffer {
  let state = seed;
  return Buffer.from(
    Array.from({ length }, () => {
      state = (Math.imul(state, 48_271) >>> 0) % 2_147_483_647;
      return 32 + (state % 90);
    }),
  );
}

describe("several members", () => {
  const texts = [noise(300_000, 7), Buffer.from("second member\n"), Buffer.alloc(0), noise(50_000, 9)];
  const whole = Buffer.concat(texts);
  const file = Buffer.concat(texts.map((text) => gzipSync(text)));

  test.each([file.length, 65_536, 4096, 7])("in chunks of %i bytes", async (size) => {
    expect((await inflate(file, size)).equals(whole)).toBe(true);
  });

  test("bytes that look like a header inside a member are data", async () => {
    const inner = Buffer.concat([noise(1000, 3), gzipSync("not a member of this file"), noise(1000, 4)]);
    const stored = Buffer.concat([gzipSync(inner, { level: 0 }), gzipSync("tail")]);
    expect((await inflate(stored, 512)).equals(Buffer.concat([inner, Buffer.from("tail")]))).toBe(true);
  });

  test("a broken checksum in the second member is an error", async () => {
    const bad = Buffer.concat([gzipSync("first"), gzipSync("second")]);
    bad[bad.length - 6] ^= 1;
    await expect(inflate(bad, 4096)).rejects.toThrow();
  });

  test("a member that ends early is an error", async () => {
    await expect(inflate(file.subarray(0, file.length - 9), 4096)).rejects.toThrow();
  });

  test("a capture in two members reads like one", async () => {
    const rows = sampled(traffic(DEMO), 500).map((s) => `${(s.at * 1e-9).toFixed(9)},${s.scl},${s.sda}\n`);
    const half = rows.length >> 1;
    const parts = [`Time [s],SCL,SDA\n${rows.slice(0, half).join("")}`, rows.slice(half).join("")];
    const read = await readText(new Uint8Array(Buffer.concat(parts.map((part) => gzipSync(part)))));
    expect(read.ticks).toEqual((await readText(parts.join(""))).ticks);
    expect(read.tail.samples).toBe(rows.length);
  });
});
