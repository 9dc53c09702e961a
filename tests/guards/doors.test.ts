// Every way into the server is made by one of two makers, which settle who asks, what may come in, and how an error goes out.

import { describe, expect, it } from "vitest";
import { parseSource, projectSources, type Source, walk } from "./sources";

const VERBS = ["GET", "HEAD", "POST", "PUT", "PATCH", "DELETE", "OPTIONS"];
/** Verb handlers and actions must be calls of these, imported from these files. */
const ROUTE = { name: "route", file: "lib/server/http/route" };
const ACTION = { name: "action", file: "lib/server/http/action" };
/** Loaded in plain Node too (migrations, the start command); what they hold is no secret of the server's. */
const PLAIN_SERVER_FILES = ["lib/server/settings.ts"];

const sources = projectSources();

interface Exported {
  readonly name: string;
  /** The function that is called to make the value, if it is a call. */
  readonly maker?: string;
}

function exportedValues(source: Source): Exported[] {
  const found: Exported[] = [];
  for (const node of source.program.body) {
    if (node.type === "ExportDefaultDeclaration") found.push({ name: "default" });
    if (node.type !== "ExportNamedDeclaration" || node.exportKind === "type") continue;
    for (const one of node.specifiers) found.push({ name: "name" in one.exported ? one.exported.name : one.exported.value });
    const { declaration } = node;
    if (declaration?.type === "FunctionDeclaration" && declaration.id) found.push({ name: declaration.id.name });
    if (declaration?.type !== "VariableDeclaration") continue;
    for (const { id, init } of declaration.declarations) {
      const maker = init?.type === "CallExpression" && init.callee.type === "Identifier" ? init.callee.name : undefined;
      if (id.type === "Identifier") found.push({ name: id.name, maker });
    }
  }
  return found;
}

function makes(source: Source, value: Exported, maker: typeof ROUTE): boolean {
  return value.maker === maker.name && source.imports.some((one) => one.target === maker.file && !one.typeOnly);
}

function badVerbs(source: Source): string[] {
  const verbs = exportedValues(source).filter(({ name }) => VERBS.includes(name));
  if (!verbs.length) return [`${source.file} exports no verb`];
  return verbs
    .filter((value) => !makes(source, value, ROUTE))
    .map(({ name }) => `${source.file}: ${name} is not made by ${ROUTE.file}`);
}

function badActions(source: Source): string[] {
  const bad = exportedValues(source).filter((value) => !makes(source, value, ACTION));
  return bad.map(({ name }) => `${source.file}: ${name} is not made by ${ACTION.file}`);
}

/** "use server" inside a function makes an action out of sight of the makers. */
function hiddenActions(source: Source): string[] {
  const found: string[] = [];
  walk(source.program, (node) => {
    if (node.type === "ExpressionStatement" && node.directive === "use server") found.push(source.file);
  });
  return source.directives.includes("use server") ? found.slice(1) : found;
}

describe("doors", () => {
  it("every verb of a route is made by the route maker", () => {
    const routes = sources.filter(({ file }) => /^app\/.*\/route\.tsx?$/.test(file));
    expect(routes.length).toBeGreaterThan(0);
    expect(routes.flatMap(badVerbs)).toEqual([]);
  });

  it("every server action is made by the action maker, in a file of actions", () => {
    const actions = sources.filter(({ directives }) => directives.includes("use server"));
    expect(actions.length).toBeGreaterThan(0);
    expect(actions.flatMap(badActions)).toEqual([]);
    expect(sources.filter(({ file }) => !file.startsWith("tests/guards/")).flatMap(hiddenActions)).toEqual([]);
  });

  it("every file of the server says that it never goes to a browser", () => {
    const bare = sources
      .filter(({ file }) => file.startsWith("lib/server/") && !PLAIN_SERVER_FILES.includes(file))
      .filter(
        ({ directives, imports }) =>
          !directives.includes("use server") && !imports.some(({ target }) => target === "server-only"),
      );
    expect(bare.map(({ file }) => file)).toEqual([]);
  });

  it("pages and layouts import no entities: they read through the server's functions", () => {
    const found = sources.filter(
      ({ file, imports }) => file.startsWith("app/") && imports.some(({ target }) => /^(entities|@mikro-orm)\b/.test(target)),
    );
    expect(found.map(({ file }) => file)).toEqual([]);
  });
});

describe("the check itself", () => {
  it("sees a verb and an action made by hand", () => {
    expect(badVerbs(parseSource("app/api/x/route.ts", "export async function GET() {}"))).toHaveLength(1);
    expect(badVerbs(parseSource("app/api/x/route.ts", "const route = (a) => a; export const GET = route(1);"))).toHaveLength(1);
    const made = 'import { route } from "@/lib/server/http/route"; export const GET = route({});';
    expect(badVerbs(parseSource("app/api/x/route.ts", made))).toEqual([]);
    expect(badActions(parseSource("lib/server/x/actions.ts", '"use server"; export async function save() {}'))).toHaveLength(1);
    expect(hiddenActions(parseSource("components/X.tsx", 'const f = async () => { "use server"; };'))).toHaveLength(1);
  });
});
