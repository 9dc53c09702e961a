// In: the checkout. Out: its source files with what they import and export, read by a parser and not by patterns.

import { spawnSync } from "node:child_process";
import { existsSync, readdirSync, readFileSync, statSync } from "node:fs";
import path from "node:path";
import { parseSync } from "oxc-parser";

export const ROOT = path.resolve(import.meta.dirname, "../..");

export interface Import {
  /** A file from the root without its ending, or a package. */
  readonly target: string;
  readonly local: boolean;
  readonly typeOnly: boolean;
}

export interface Source {
  readonly file: string;
  readonly text: string;
  readonly lines: number;
  readonly imports: readonly Import[];
  /** "use client", "use server" at the top. */
  readonly directives: readonly string[];
  readonly program: ReturnType<typeof parseSync>["program"];
}

/** Files that git knows or would add; where there is no repository to ask (an unpacked archive), all that is not made here. */
export function projectFiles(): string[] {
  const asked = spawnSync("git", ["ls-files", "-z", "--cached", "--others", "--exclude-standard"], {
    cwd: ROOT,
    encoding: "utf8",
  });
  const listed = asked.status === 0 ? asked.stdout.split("\0") : foundFiles();
  return listed.filter((file) => file && existsSync(path.join(ROOT, file)));
}

const MADE_HERE = /^(node_modules|\.git|\.firstlow|\.next.*|next-env\.d\.ts|test-results|.*\.tsbuildinfo)$/;

function foundFiles(): string[] {
  const tops = readdirSync(ROOT).filter((name) => !MADE_HERE.test(name));
  return tops.flatMap((name) => {
    if (!statSync(path.join(ROOT, name)).isDirectory()) return [name];
    const inside = readdirSync(path.join(ROOT, name), { recursive: true, encoding: "utf8" }).map((file) =>
      path.posix.join(name, file),
    );
    return inside.filter((file) => !file.startsWith("tests/.output") && statSync(path.join(ROOT, file)).isFile());
  });
}

let sources: Source[] | undefined;

/** Every TypeScript file, parsed once. */
export function projectSources(): Source[] {
  sources ??= projectFiles()
    .filter((file) => /\.(ts|tsx|mts)$/.test(file))
    .map(readSource);
  return sources;
}

export function readSource(file: string): Source {
  return parseSource(file, readFileSync(path.join(ROOT, file), "utf8"));
}

/** `text` as if it stood in `file`; for the guards' own tests. */
export function parseSource(file: string, text: string): Source {
  const { program, module, errors } = parseSync(file, text);
  if (errors.length) throw new Error(`${file} cannot be parsed: ${errors[0].message}`);
  const imports: Import[] = [];
  const add = (request: string, typeOnly: boolean) => imports.push({ ...resolve(file, request), typeOnly });
  for (const one of module.staticImports)
    add(one.moduleRequest.value, one.entries.length > 0 && one.entries.every((entry) => entry.isType));
  for (const one of module.staticExports) {
    const from = one.entries.filter((entry) => entry.moduleRequest);
    if (from[0]?.moduleRequest)
      add(
        from[0].moduleRequest.value,
        from.every((entry) => entry.isType),
      );
  }
  for (const one of module.dynamicImports) {
    const quoted = /^["'`]([^"'`$]+)["'`]$/.exec(text.slice(one.moduleRequest.start, one.moduleRequest.end));
    if (quoted) add(quoted[1], false);
  }
  const directives = program.body.flatMap((node) =>
    node.type === "ExpressionStatement" && "directive" in node ? [String(node.directive)] : [],
  );
  return { file, text, lines: text.trimEnd().split("\n").length, imports, directives, program };
}

function resolve(file: string, request: string): { target: string; local: boolean } {
  const plain = request.replace(/\.(tsx?|mjs)$/, "");
  if (request.startsWith("@/")) return { target: plain.slice(2), local: true };
  if (request.startsWith(".")) return { target: path.posix.join(path.posix.dirname(file), plain), local: true };
  return { target: packageOf(request), local: false };
}

/** "@scope/name/deep" and "name/deep" are the package; node: modules keep their name. */
function packageOf(request: string): string {
  if (request.startsWith("node:")) return request;
  const [first, second] = request.split("/");
  return first.startsWith("@") ? `${first}/${second}` : first;
}

interface Node {
  readonly type: string;
  readonly start: number;
  readonly end: number;
  readonly [name: string]: unknown;
}

/** Visits every node of a syntax tree. */
export function walk(node: unknown, visit: (node: Node) => void): void {
  if (Array.isArray(node)) {
    for (const one of node) walk(one, visit);
    return;
  }
  if (node === null || typeof node !== "object") return;
  if ("type" in node && typeof node.type === "string" && "start" in node) visit(node as unknown as Node);
  for (const value of Object.values(node)) if (value !== null && typeof value === "object") walk(value, visit);
}

const lineStarts = new WeakMap<Source, number[]>();

/** Line of an offset, from 1. */
export function lineAt(source: Source, offset: number): number {
  let starts = lineStarts.get(source);
  if (!starts) {
    starts = [0];
    for (let at = source.text.indexOf("\n"); at >= 0; at = source.text.indexOf("\n", at + 1)) starts.push(at + 1);
    lineStarts.set(source, starts);
  }
  let low = 0;
  let high = starts.length;
  while (low + 1 < high) {
    const middle = (low + high) >> 1;
    if (starts[middle] <= offset) low = middle;
    else high = middle;
  }
  return low + 1;
}
