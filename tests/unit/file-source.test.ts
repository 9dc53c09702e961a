import { expect, test } from "vitest";
import { fileSource } from "@/workers/host";
import { warmUp } from "@/workers/warm-up";

const BYTES = 2_500_000;

function content(): Uint8Array<ArrayBuffer> {
  const bytes = new Uint8Array(BYTES);
  for (let k = 0; k < BYTES; k++) bytes[k] = (k * 31 + (k >> 12)) & 0xff;
  return bytes;
}

/** Chunks are copied: the source may use its buffer again. */
async function read(source: ReturnType<typeof fileSource>): Promise<{ bytes: Buffer; chunks: number[] }> {
  const parts: Uint8Array[] = [];
  for await (const chunk of source.open()) parts.push(chunk.slice());
  return { bytes: Buffer.concat(parts), chunks: parts.map((part) => part.length) };
}

test("a file is read whole, as often as it is asked for", async () => {
  const bytes = content();
  const source = fileSource(new Blob([bytes]), "a.csv");
  for (let round = 0; round < 2; round++) expect((await read(source)).bytes.equals(bytes)).toBe(true);
});

test("its first chunk is short, so that the first edges leave at once", async () => {
  const { chunks } = await read(fileSource(new Blob([content()]), "a.csv"));
  expect(chunks[0]).toBe(256 * 1024);
});

test("two readings of one file do not disturb each other", async () => {
  const bytes = content();
  const source = fileSource(new Blob([bytes]), "a.csv");
  const both = await Promise.all([read(source), read(source)]);
  for (const one of both) expect(one.bytes.equals(bytes)).toBe(true);
});

test("a reading that is left early does not keep the next from beginning at the start", async () => {
  const bytes = content();
  const source = fileSource(new Blob([bytes]), "a.csv");
  let seen = 0;
  for await (const chunk of source.open()) {
    seen += chunk.length;
    if (seen > 300_000) break;
  }
  expect((await read(source)).bytes.equals(bytes)).toBe(true);
});

test("a browser whose files are no streams of bytes is read all the same", async () => {
  const bytes = content();
  const blob = new Blob([bytes]);
  const cut = (from = 0, to = blob.size): Blob =>
    Object.assign(new Blob([bytes.subarray(from, to)]), {
      stream: () =>
        new ReadableStream<Uint8Array<ArrayBuffer>>({
          start(controller) {
            for (let at = from; at < to; at += 65_536) controller.enqueue(bytes.slice(at, Math.min(to, at + 65_536)));
            controller.close();
          },
        }),
    });
  const plain = Object.assign(new Blob([bytes]), { slice: cut });
  expect((await read(fileSource(plain, "a.csv"))).bytes.equals(bytes)).toBe(true);
});

test("an empty file has no chunk", async () => {
  expect((await read(fileSource(new Blob([]), "a.csv"))).chunks).toEqual([]);
});

test("the capture a waiting worker warms up with can be read", async () => {
  await warmUp(() => false);
});

test("warming up ends as soon as there is a real file", async () => {
  let asked = 0;
  await warmUp(() => ++asked > 1);
  expect(asked).toBe(2);
});
