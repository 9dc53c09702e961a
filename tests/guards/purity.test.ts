// Pure rooms compile without DOM and Node types (pure.tsconfig.json). What types cannot see is looked for here.

import { readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";
import { ROOMS, roomOf } from "./rooms";
import { lineAt, parseSource, projectSources, ROOT, type Source, walk } from "./sources";

const IMPURE_MEMBERS = new Set(["Math.random", "Date.now", "performance.now"]);
const IMPURE_NAMES = new Set(["globalThis", "eval", "console", "process"]);

function impurities(source: Source): string[] {
  const found: string[] = [];
  const report = (offset: number, what: string) => found.push(`${source.file}:${lineAt(source, offset)}: ${what}`);
  const names = propertyNames(source);
  walk(source.program, (node) => {
    if (!["MemberExpression", "Identifier", "NewExpression"].includes(node.type) || node.end - node.start > 40) return;
    const text = source.text.slice(node.start, node.end);
    if (node.type === "MemberExpression" && IMPURE_MEMBERS.has(text)) report(node.start, text);
    if (node.type === "Identifier" && IMPURE_NAMES.has(text) && !names.has(node.start)) report(node.start, text);
    if (node.type === "NewExpression" && /^new Date\(\s*\)$/.test(text)) report(node.start, text);
  });
  return found;
}

/** Where names of properties stand: `record.process` is not the global of that name. */
function propertyNames(source: Source): Set<number> {
  const starts = new Set<number>();
  walk(source.program, (node) => {
    const name = node.type === "MemberExpression" ? node.property : node.key;
    if (!node.computed && name !== null && typeof name === "object" && "start" in name) starts.add(Number(name.start));
  });
  return starts;
}

describe("pure rooms", () => {
  it("read no clock, draw no random number, log nothing", () => {
    const pure = projectSources().filter(({ file }) => roomOf(file)?.pure);
    expect(pure.length).toBeGreaterThan(0);
    expect(pure.flatMap(impurities)).toEqual([]);
  });

  it("are all compiled without DOM and Node types", () => {
    const { include } = JSON.parse(readFileSync(path.join(ROOT, "tests/guards/pure.tsconfig.json"), "utf8"));
    const missing = ROOMS.filter(
      ({ pure, place }) =>
        pure && !include.some((glob: string) => place.startsWith(glob.replace("../../", "").replace("/**/*.ts", ""))),
    );
    expect(missing.map(({ place }) => place)).toEqual([]);
  });
});

describe("the environment", () => {
  it("is read in one file of the application", () => {
    const found = projectSources()
      .filter(({ file }) => /^(app|components|lib|entities|proxy)/.test(file) && file !== "lib/server/settings.ts")
      .filter(({ text }) => /\bprocess\.env\b/.test(text));
    expect(found.map(({ file }) => file)).toEqual([]);
  });
});

describe("the check itself", () => {
  it("sees a clock, dice and a log, and no words in comments", () => {
    const text = "// Math.random\nexport const a = Math.random() + Date.now() + +new Date();\nconsole.log(a);";
    expect(impurities(parseSource("lib/base/x.ts", text)).length).toBe(4);
  });
});
