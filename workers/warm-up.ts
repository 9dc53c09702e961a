// In: nothing. Out: a small capture of our own making, read and analysed once or twice by a worker that waits for a file: the
// program is then parsed, and its inner loops are compiled, before somebody picks one.

import { analyze } from "@/lib/diagnosis/analyze";
import type { ByteSource } from "@/lib/engine/bytes/source";
import { openCapture } from "@/lib/engine/samples/open";
import { previewCapture } from "@/lib/engine/samples/preview";
import { host } from "./host";

/** Some 3700 rows: enough for the compiler to find the loops over them worth its while. */
const TRANSACTIONS = 12;
const WRITTEN = [0xa0, 0x01, 0x3c];
/** More than one round: what ran once is interpreted, what comes again gets compiled. */
const ROUNDS = 2;

/** Writes to the device at 0x50 at 100 kHz, sampled ten times a bit. */
function capture(): Uint8Array {
  const rows = ["Time (us),SCL,SDA"];
  const hold = (scl: number, sda: number, samples: number): void => {
    for (let k = 0; k < samples; k++) rows.push(`${rows.length - 1},${scl},${sda}`);
  };
  const bit = (sda: number): void => {
    hold(0, sda, 3);
    hold(1, sda, 5);
    hold(0, sda, 2);
  };
  for (let n = 0; n < TRANSACTIONS; n++) {
    hold(1, 1, 20);
    hold(1, 0, 5);
    for (const byte of WRITTEN) {
      for (let place = 7; place >= 0; place--) bit((byte >> place) & 1);
      bit(0);
    }
    hold(0, 0, 3);
    hold(1, 0, 5);
  }
  return new TextEncoder().encode(`${rows.join("\n")}\n`);
}

/** Stops between two steps once `wanted` says that there is real work. */
export async function warmUp(wanted: () => boolean): Promise<void> {
  const bytes = capture();
  const source: ByteSource = {
    name: "warm-up.csv",
    size: bytes.length,
    async *open() {
      yield bytes;
    },
  };
  const nothing = () => undefined;
  const listener = { head: nothing, edges: nothing, tap: nothing, transactions: nothing, progress: nothing };
  const settings = { read: {}, limits: null, cb_pf: null, roster: [], log: [] };
  for (let round = 0; round < ROUNDS; round++) {
    for (const step of [read, look]) {
      // A turn for messages: whoever waits for a real file goes first.
      await new Promise((resolve) => setTimeout(resolve));
      if (wanted()) return;
      await step();
    }
  }

  async function read(): Promise<void> {
    const opened = await openCapture(source, host, {});
    if (!opened.ok) throw new Error(opened.problem.message);
    await analyze(opened.value, settings, listener);
  }

  async function look(): Promise<void> {
    await previewCapture(source, host, {});
  }
}
