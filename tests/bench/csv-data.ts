// Captures for the CSV rows of the bench, written once into the ignored data folder: seeded, so every machine reads the
// same bytes. Traffic at about 100 kHz with idle between transactions.

import { existsSync } from "node:fs";
import { mkdir, open, rename } from "node:fs/promises";

const FOLDER = new URL("../../.firstlow/bench/", import.meta.url).pathname;
/** Size of each file in bytes; set FIRSTLOW_BENCH_MB for another one. */
export const BENCH_BYTES = Number(process.env.FIRSTLOW_BENCH_MB ?? 64) * 1_000_000;

/** Small seeded generator (mulberry32). */
function seeded(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed = (mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61)) ^ mixed;
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 2 ** 32;
  };
}

/** Endless bus: levels, and for how many nanoseconds they hold. */
function* bus(random: () => number): Generator<{ scl: number; sda: number; hold: number }> {
  const quarter = () => 2400 + Math.floor(random() * 200);
  for (;;) {
    yield { scl: 1, sda: 1, hold: 20_000 + Math.floor(random() * 400_000) };
    yield { scl: 1, sda: 0, hold: 4700 };
    const bytes = 1 + Math.floor(random() * 8);
    for (let byte = 0; byte < bytes; byte += 1) {
      const value = Math.floor(random() * 256);
      for (let bit = 7; bit >= -1; bit -= 1) {
        const sda = bit < 0 ? 0 : (value >> bit) & 1;
        yield { scl: 0, sda, hold: quarter() * 2 };
        yield { scl: 1, sda, hold: quarter() * 2 };
      }
    }
    yield { scl: 0, sda: 0, hold: quarter() * 2 };
    yield { scl: 1, sda: 0, hold: 4700 };
  }
}

class Out {
  bytes = 0;
  private parts: string[] = [];
  private pending = 0;
  constructor(private readonly file: Awaited<ReturnType<typeof open>>) {}
  async put(text: string): Promise<void> {
    this.parts.push(text);
    this.pending += text.length;
    this.bytes += text.length;
    if (this.pending > 1 << 20) await this.flush();
  }
  async flush(): Promise<void> {
    await this.file.write(this.parts.join(""));
    this.parts = [];
    this.pending = 0;
  }
}

type Writer = (out: Out) => Promise<void>;

/** `time,0/1,0/1` at 10 MS/s. */
const digital: Writer = async (out) => {
  await out.put("time (us),SCL,SDA\n");
  let at = 0;
  for (const { scl, sda, hold } of bus(seeded(1))) {
    for (const end = at + hold; at < end; at += 100) await out.put(`${(at / 1000).toFixed(1)},${scl},${sda}\n`);
    if (out.bytes >= BENCH_BYTES) return;
  }
};

/** A row per change. */
const changes: Writer = async (out) => {
  await out.put("time (us),SCL,SDA\n");
  let at = 0;
  for (const { scl, sda, hold } of bus(seeded(2))) {
    await out.put(`${(at / 1000).toFixed(3)},${scl},${sda}\n`);
    at += hold;
    if (out.bytes >= BENCH_BYTES) return;
  }
};

/** RC edges (150 ns) with noise at 20 MS/s. */
function analog(row: (at: number, scl: number, sda: number) => string): Writer {
  return async (out) => {
    await out.put("Time (s),SCL (V),SDA (V)\n");
    const random = seeded(3);
    let at = 0;
    let v = 3.3;
    let w = 3.3;
    for (const { scl, sda, hold } of bus(random)) {
      for (const end = at + hold; at < end; at += 50) {
        v += ((scl === 1 ? 3.3 : 0.12) - v) * (scl === 1 ? 0.28 : 0.8);
        w += ((sda === 1 ? 3.3 : 0.15) - w) * (sda === 1 ? 0.28 : 0.8);
        await out.put(row(at, v + (random() - 0.5) * 0.04, w + (random() - 0.5) * 0.04));
      }
      if (out.bytes >= BENCH_BYTES) return;
    }
  };
}

const WRITERS: Readonly<Record<string, Writer>> = {
  digital,
  changes,
  plain: analog((at, scl, sda) => `${(at * 1e-9).toFixed(8)},${scl.toFixed(3)},${sda.toFixed(3)}\n`),
  scientific: analog((at, scl, sda) => `${(at * 1e-9).toExponential(9)},${scl.toExponential(5)},${sda.toExponential(5)}\n`),
};

/** Path of the file, written now if it is not there. */
export async function benchFile(name: keyof typeof WRITERS & string): Promise<string> {
  const path = `${FOLDER}${name}-${BENCH_BYTES}.csv`;
  if (existsSync(path)) return path;
  await mkdir(FOLDER, { recursive: true });
  const file = await open(`${path}.part`, "w");
  const out = new Out(file);
  await WRITERS[name](out);
  await out.flush();
  await file.close();
  await rename(`${path}.part`, path);
  return path;
}
