// npm run bench [-- SUITE...]: runs every suite of this folder (or the named ones) and prints its rows.
// A suite file exports `suite`; files without one are helpers. Exit code 1 where a goal is missed.

import { readdir } from "node:fs/promises";
import { met, type Row, ratio, type Suite } from "./measure";

const here = new URL(".", import.meta.url);
const wanted = process.argv.slice(2);

function isSuite(value: unknown): value is Suite {
  return typeof value === "object" && value !== null && "name" in value && "run" in value;
}

function line(row: Row): string {
  const bound = `${row.sense === "at most" ? "<=" : ">="} ${row.limit}x`;
  const unit = row.unit ?? "ms";
  const times = `${row.ms.toFixed(0)} ${unit} against ${row.baselineMs.toFixed(0)} ${unit} of ${row.baseline}`;
  return `  ${met(row) ? "met   " : "MISSED"} goal ${row.goal.padEnd(3)} ${row.what.padEnd(58)} ${`${ratio(row).toFixed(2)}x`.padStart(8)}  ${bound.padEnd(9)} (${times})`;
}

let missed = 0;
let rows = 0;
for (const file of (await readdir(here)).filter((name) => name.endsWith(".ts")).sort()) {
  if (file === "run.ts" || file === "measure.ts") continue;
  const loaded: Record<string, unknown> = await import(new URL(file, here).href);
  const suite = loaded.suite;
  if (!isSuite(suite) || (wanted.length > 0 && !wanted.includes(suite.name))) continue;
  console.log(`${suite.name}`);
  for (const row of await suite.run()) {
    console.log(line(row));
    rows += 1;
    if (!met(row)) missed += 1;
  }
}
console.log(`${rows - missed} goals met, ${missed} missed`);
process.exitCode = missed > 0 ? 1 : 0;
