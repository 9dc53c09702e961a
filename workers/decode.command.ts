// The decode command: one capture in, one report out. Glue only; what it prints is described in README.md.

import { readOptions, USAGE, UsageError } from "./decode/options";
import { Output } from "./decode/output";

async function main(): Promise<number> {
  const output = new Output(process.stdout);
  try {
    const asked = readOptions(process.argv.slice(2));
    if (asked === null) {
      await output.write([USAGE]);
      return 0;
    }
    // Loaded late, so that a wrong option answers at once.
    const { run, Unusable } = await import("./decode/run");
    try {
      return await run(asked, output);
    } catch (error) {
      if (!(error instanceof Unusable)) throw error;
      process.stderr.write(`${error.message}\n`);
      return 3;
    }
  } catch (error) {
    if (!(error instanceof UsageError)) throw error;
    process.stderr.write(`${error.message}\n\n${USAGE}`);
    return 2;
  }
}

// A crash is our fault and must not read as "decoded, something failed".
process.exitCode = await main().catch((error: unknown) => {
  process.stderr.write(`The decoder itself failed: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`);
  return 3;
});
