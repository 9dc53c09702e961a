import { existsSync, readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";
import { ROOMS, TOP_LEVEL } from "./rooms";
import { lineAt, parseSource, projectFiles, projectSources, ROOT, type Source, walk } from "./sources";

/** About 300 and about 60 are the aim (DEVELOPERS.md); these are where it stops. Published tables are data and as long as they are. */
const MOST_LINES = 360;
const DATA = /^lib\/limits\/published\//;
/** Of a function's own lines, without those of functions inside it; markup is longer than logic. */
const MOST_OWN_LINES = { ts: 80, tsx: 110 };
const DRAWERS = /(^|\/)(utils?|helpers?|misc|common|index)(\.|\/)/;

const files = projectFiles();
const sources = projectSources();
const product = sources.filter(({ file }) => !file.startsWith("tests/") && !file.startsWith("migrations/"));

describe("the top level", () => {
  it("has no stray", () => {
    const found = [...new Set(files.map((file) => file.split("/")[0]))].filter((name) => !TOP_LEVEL.includes(name));
    expect(found).toEqual([]);
  });
});

describe("names", () => {
  it("of files are nouns in kebab-case, or a component's name", () => {
    const framework = /^(not-found|global-error)$/;
    const odd = product.filter(({ file }) => {
      const name = path.basename(file).replace(/\.(ts|tsx)$/, "");
      if (file.endsWith(".tsx") && file.startsWith("components/")) return !/^[A-Z][A-Za-z0-9]*$/.test(name);
      return !/^[a-z][a-z0-9]*(-[a-z0-9]+)*(\.[a-z]+)*$/.test(name) && !/^use[A-Z]\w*$/.test(name) && !framework.test(name);
    });
    expect(odd.map(({ file }) => file)).toEqual([]);
    expect(files.filter((file) => DRAWERS.test(file) && /\.tsx?$/.test(file))).toEqual([]);
  });
});

describe("size", () => {
  it("of files stays readable", () => {
    const long = product.filter(({ file, lines }) => lines > MOST_LINES && !DATA.test(file));
    expect(long.map(({ file, lines }) => `${file}: ${lines} lines`)).toEqual([]);
  });

  it("of functions stays readable", () => {
    expect(product.flatMap(longFunctions)).toEqual([]);
  });
});

function longFunctions(source: Source): string[] {
  const found: { start: number; end: number }[] = [];
  walk(source.program, (node) => {
    if (/Function(Declaration|Expression)$/.test(node.type)) found.push(node);
  });
  const most = source.file.endsWith(".tsx") ? MOST_OWN_LINES.tsx : MOST_OWN_LINES.ts;
  const span = ({ start, end }: { start: number; end: number }) => lineAt(source, end) - lineAt(source, start) + 1;
  return found.flatMap((one) => {
    const inside = found.filter((other) => other !== one && other.start >= one.start && other.end <= one.end);
    const outermost = inside.filter(
      (other) => !inside.some((third) => third !== other && third.start <= other.start && third.end >= other.end),
    );
    const own = span(one) - outermost.reduce((sum, other) => sum + span(other) - 1, 0);
    return own > most ? [`${source.file}:${lineAt(source, one.start)}: ${own} lines of its own`] : [];
  });
}

/** What switches the type checker off. */
function looseTypes(source: Source): string[] {
  const found: string[] = [];
  walk(source.program, (node) => {
    if (node.type === "TSAnyKeyword") found.push(`${source.file}:${lineAt(source, node.start)}: any`);
    if (node.type === "TSNonNullExpression") found.push(`${source.file}:${lineAt(source, node.start)}: !`);
  });
  const comment = /@ts-(ignore|nocheck|expect-error)|biome-ignore(?!.*: \S)/.exec(source.text);
  if (comment && !source.file.startsWith("tests/")) found.push(`${source.file}:${lineAt(source, comment.index)}: ${comment[0]}`);
  return found;
}

describe("types", () => {
  it("are never switched off", () => {
    expect(sources.filter(({ file }) => file !== "tests/guards/house.test.ts").flatMap(looseTypes)).toEqual([]);
  });
});

/** Exports by default where the framework or a tool insists on them. */
const DEFAULT_EXPORTS =
  /^(app\/.*(page|layout|loading|error|not-found|global-error|template|default|icon|robots|sitemap|manifest)\.tsx?|.*\.config\.ts)$/;

describe("exports", () => {
  it("have names", () => {
    const found = product.filter(
      ({ file, program }) => !DEFAULT_EXPORTS.test(file) && program.body.some((node) => node.type === "ExportDefaultDeclaration"),
    );
    expect(found.map(({ file }) => file)).toEqual([]);
  });
});

describe("tests", () => {
  it("are all run", () => {
    const found = sources
      .filter(({ file }) => /\.(test|spec)\.tsx?$/.test(file))
      .filter(({ text }) => /\b(it|test|describe)\.(skip|only|todo|fixme|fails)\b|\b(xit|xdescribe)\(/.test(text))
      .filter(({ file }) => file !== "tests/guards/house.test.ts");
    expect(found.map(({ file }) => file)).toEqual([]);
  });

  it("exist for every fault rule", () => {
    const texts = sources.filter(({ file }) => file.startsWith("tests/unit/")).map(({ text }) => text);
    const rules = files
      .filter((file) => /^lib\/diagnosis\/rules\/[a-z-]+\.ts$/.test(file))
      .map((file) => path.basename(file, ".ts"));
    expect(rules.length).toBeGreaterThan(0);
    expect(rules.filter((rule) => !texts.some((text) => text.includes(rule)))).toEqual([]);
  });
});

describe("documents", () => {
  const documents = ["README.md", "DEVELOPERS.md"];

  it.each(documents)("%s names only paths and scripts that exist", (document) => {
    expect(deadNames(readFileSync(path.join(ROOT, document), "utf8"))).toEqual([]);
  });

  it("name every room", () => {
    const text = readFileSync(path.join(ROOT, "DEVELOPERS.md"), "utf8");
    expect(ROOMS.filter(({ place }) => !text.includes(place)).map(({ place }) => place)).toEqual([]);
  });
});

/** Paths in code spans and links, and "npm run" scripts, that are not there. */
function deadNames(text: string): string[] {
  const scripts: Record<string, string> = JSON.parse(readFileSync(path.join(ROOT, "package.json"), "utf8")).scripts;
  const spans = [...text.matchAll(/`([^`\n]+)`|\]\(([^)#\s]+)\)/g)].map((match) => match[1] ?? match[2]);
  const tops = new Set(TOP_LEVEL);
  const dead = spans
    .filter(
      (span) =>
        /^\.?\/?[\w.@()[\]-]+(\/[\w.@()[\]*-]+)*\/?$/.test(span) &&
        tops.has(span.replace(/^\.\//, "").split("/")[0]) &&
        !span.includes("*"),
    )
    .filter((span) => !existsSync(path.join(ROOT, span)));
  const unknown = [...text.matchAll(/npm run (?:--silent )?([a-z][\w:-]*)/g)]
    .map((match) => match[1])
    .filter((name) => !(name in scripts));
  return [...dead, ...unknown.map((name) => `npm run ${name}`)];
}

describe("the check itself", () => {
  it("sees a long function, a loose type, a dead path and a dead script", () => {
    const long = `export function f() {\n${"  g();\n".repeat(80)}}`;
    expect(longFunctions(parseSource("lib/base/x.ts", long))).toHaveLength(1);
    expect(looseTypes(parseSource("lib/base/x.ts", "export const a = (b as any).c!;"))).toHaveLength(2);
    expect(deadNames("see `lib/nowhere/x.ts` and `lib/base`, run `npm run nothing`")).toEqual([
      "lib/nowhere/x.ts",
      "npm run nothing",
    ]);
  });
});
