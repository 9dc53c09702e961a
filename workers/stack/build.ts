// In: the sources. Out: a production build of exactly these sources, made only when they changed.

import { createHash } from "node:crypto";
import { readdir, readFile, writeFile } from "node:fs/promises";
import path from "node:path";
import { Complaint } from "./complaint";
import { run } from "./process";

const NEXT = "node_modules/next/dist/bin/next";
// What the framework reads for a build. Tests, fixtures and this folder leave a build as it is.
const FOLDERS = ["app", "components", "entities", "lib", "migrations", "workers"];
const FILES = [
  "mikro-orm.config.ts",
  "next.config.mjs",
  "package-lock.json",
  "postcss.config.mjs",
  "proxy.ts",
  "tailwind.config.ts",
  "tsconfig.json",
];

export interface BuildResult {
  readonly built: boolean;
  readonly seconds: number;
}

/** Builds into `dist` (relative to `root`) unless what lies there was built from the same sources. */
export async function build(root: string, dist: string, show: boolean): Promise<BuildResult> {
  const began = performance.now();
  const stampFile = path.join(root, dist, "firstlow-stamp");
  const stamp = await sourceStamp(root);
  const seconds = () => (performance.now() - began) / 1000;
  if ((await readFile(stampFile, "utf8").catch(() => "")) === stamp) return { built: false, seconds: seconds() };
  if (show) console.log("Building the application (only after a change; about half a minute) ...");
  const env = { ...process.env, NODE_ENV: "production", FIRSTLOW_DIST: dist, NEXT_TELEMETRY_DISABLED: "1" } as NodeJS.ProcessEnv;
  const made = await run({ name: "next build", file: process.execPath, args: [NEXT, "build"], cwd: root, env, limit: 900_000 });
  if (made.code !== 0) {
    const full = /ENOSPC|No space left/.test(made.output);
    throw new Complaint(
      `The application could not be built${made.timedOut ? " within fifteen minutes" : ""}:\n${made.output.trim().split("\n").slice(-40).join("\n")}`,
      full ? "The disk is full: free about 1 GB and start again." : "Put that right and start again.",
    );
  }
  await writeFile(stampFile, stamp);
  return { built: true, seconds: seconds() };
}

async function sourceStamp(root: string): Promise<string> {
  const hash = createHash("sha256").update(process.version);
  for (const folder of FOLDERS) {
    const entries = await readdir(path.join(root, folder), { recursive: true, withFileTypes: true }).catch(() => []);
    const files = entries.filter((entry) => entry.isFile()).map((entry) => path.join(entry.parentPath, entry.name));
    for (const file of files.sort()) {
      if (!file.startsWith(path.join(root, "workers", "stack"))) await add(file);
    }
  }
  for (const file of FILES) await add(path.join(root, file));
  return hash.digest("hex");

  async function add(file: string): Promise<void> {
    const content = await readFile(file).catch(() => undefined);
    if (content) hash.update(`${path.relative(root, file)}\0${content.length}\0`).update(content);
  }
}
