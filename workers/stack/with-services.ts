// In: a command line. Out: the command, run with throw-away services whose settings stand in its environment; all gone afterwards.
// "npm run with-services -- npx vitest run --config tests/vitest.config.ts --project db tests/db/storage.test.ts"

import path from "node:path";
import { complain } from "./complaint";
import { anyPort } from "./port";
import { endAll, run } from "./process";
import { openTestbed, type Testbed } from "./testbed";

const [file, ...args] = process.argv.slice(2);
let testbed: Testbed | undefined;
let code = 2;
for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"] as const) process.on(signal, () => void endAll());
try {
  if (!file) throw new Error("Give a command to run.");
  testbed = await openTestbed(path.resolve(import.meta.dirname, "../.."), `http://127.0.0.1:${await anyPort()}`);
  const env = await testbed.environment("tests");
  code = (await run({ name: file, file, args, env, show: true })).code;
} catch (error) {
  complain(error);
} finally {
  await testbed?.close();
}
process.exit(code);
