import { readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";
import { ROOMS, type Room, roomOf } from "./rooms";
import { type Import, parseSource, projectSources, ROOT, type Source } from "./sources";

const packages: { dependencies: Record<string, string>; devDependencies: Record<string, string> } = JSON.parse(
  readFileSync(path.join(ROOT, "package.json"), "utf8"),
);
const sources = projectSources();
const byFile = new Map(sources.map((source) => [source.file, source]));
const product = sources.filter(({ file }) => !file.startsWith("tests/"));

/** Why an import is not allowed, or undefined. */
function objection(source: Source, room: Room, one: Import): string | undefined {
  const says = (why: string) => `${source.file} imports ${one.target}: ${why}`;
  if (!one.local) return packageObjection(room, one.target) && says(packageObjection(room, one.target) ?? "");
  if (one.target.startsWith("tests/")) return says("the product imports no tests");
  if (one.target.endsWith(".json") || one.target.endsWith(".css")) return undefined;
  const target = roomOf(one.target);
  if (!target) return says("that is in no room");
  if (target.place === room.place || room.from.includes(target.place)) return undefined;
  if (one.typeOnly && room.typesFrom?.includes(target.place)) return undefined;
  return says(`${room.place} may not import ${target.place}${room.typesFrom?.includes(target.place) ? " except types" : ""}`);
}

function packageObjection(room: Room, name: string): string | undefined {
  if (name.startsWith("node:")) {
    return room.packages.includes("*") || room.packages.includes("node:*") ? undefined : `${room.place} has no Node`;
  }
  if (!(name in packages.dependencies)) return "not among the dependencies of package.json";
  return room.packages.includes("*") || room.packages.includes(name) ? undefined : `${room.place} may not use that package`;
}

function objections(source: Source): string[] {
  const room = roomOf(source.file);
  if (!room) return [`${source.file} is in no room`];
  return source.imports.map((one) => objection(source, room, one)).filter((one) => one !== undefined);
}

describe("rooms", () => {
  it("import only what their plan allows", () => {
    expect(product.flatMap(objections)).toEqual([]);
  });

  it("are all there, or planned for nothing", () => {
    const empty = ROOMS.filter(({ place }) => !sources.some(({ file }) => file === place || file.startsWith(`${place}/`)));
    expect(empty.map(({ place }) => place)).toEqual([]);
  });

  it("of React reach the server through actions only", () => {
    const found = product
      .filter(({ file }) => file.startsWith("components/"))
      .flatMap(({ file, imports }) =>
        imports.filter((one) => one.target.startsWith("lib/server/") && !one.typeOnly).map((one) => ({ file, ...one })),
      )
      .filter(({ target }) => !byFile.get(`${target}.ts`)?.directives.includes("use server"));
    expect(found.map(({ file, target }) => `${file} imports ${target}, which is not a file of actions`)).toEqual([]);
  });

  it("have no ring of imports", () => {
    expect(rings(product)).toEqual([]);
  });
});

/** Files that import each other in a ring by value; the shortest way to code that fails depending on who loads first. */
function rings(all: readonly Source[]): string[] {
  const found: string[] = [];
  const state = new Map<string, "open" | "done">();
  const visit = (source: Source, trail: readonly string[]) => {
    state.set(source.file, "open");
    for (const one of source.imports.filter((each) => each.local && !each.typeOnly)) {
      const next = [`${one.target}.ts`, `${one.target}.tsx`].map((file) => byFile.get(file)).find((each) => each !== undefined);
      if (!next) continue;
      if (state.get(next.file) === "open") found.push([...trail.slice(trail.indexOf(next.file)), next.file].join(" -> "));
      else if (!state.has(next.file)) visit(next, [...trail, next.file]);
    }
    state.set(source.file, "done");
  };
  for (const source of all) if (!state.has(source.file)) visit(source, [source.file]);
  return found;
}

describe("the check itself", () => {
  const complaintsAbout = (file: string, text: string) => objections(parseSource(file, text));

  it("sees a forbidden room, whichever way it is imported", () => {
    expect(complaintsAbout("lib/engine/bits/x.ts", 'import { a } from "../../server/rate";')).toHaveLength(1);
    expect(complaintsAbout("lib/engine/bits/x.ts", 'export { a } from "@/lib/server/rate";')).toHaveLength(1);
    expect(complaintsAbout("lib/engine/bits/x.ts", 'export const a = () => import("@/lib/server/rate");')).toHaveLength(1);
    expect(complaintsAbout("lib/engine/bits/x.ts", 'import { a } from "../samples/edges";')).toEqual([]);
  });

  it("lets types through where only types are allowed", () => {
    expect(complaintsAbout("lib/forensics/x.ts", 'import type { Contest } from "../diagnosis/report";')).toEqual([]);
    expect(complaintsAbout("lib/forensics/x.ts", 'import { ContestSchema } from "../diagnosis/report";')).toHaveLength(1);
  });

  it("sees a package that a room may not use, and one that only tests have", () => {
    expect(complaintsAbout("lib/view/x.ts", 'import React from "react";')).toHaveLength(1);
    expect(complaintsAbout("lib/server/x.ts", 'import { test } from "vitest";')).toHaveLength(1);
    expect(complaintsAbout("lib/case/x.ts", 'import fs from "node:fs";')).toHaveLength(1);
  });

  it("sees a file in no room", () => {
    expect(complaintsAbout("scripts/x.ts", "")).toHaveLength(1);
  });
});
