// The plan of the house as data. A file belongs to the room with the longest matching folder; rooms.test.ts checks every import.

export interface Room {
  /** Folder, or one file, from the root. */
  readonly place: string;
  readonly holds: string;
  /** Places whose values and types may be imported besides the room itself. */
  readonly from: readonly string[];
  /** Places of which only types may be imported. */
  readonly typesFrom?: readonly string[];
  /** npm packages and node: modules; "*" is any that package.json names under dependencies. */
  readonly packages: readonly string[];
  /** Compiles without DOM and Node types, reads no clock, draws no random number, logs nothing. */
  readonly pure?: boolean;
}

const ENGINE = [
  "lib/engine",
  "lib/engine/bytes",
  "lib/engine/samples",
  "lib/engine/channels",
  "lib/engine/bits",
  "lib/engine/bus",
  "lib/engine/archive",
];
const PURE = ["lib/base", ...ENGINE, "lib/limits", "lib/forensics", "lib/diagnosis", "lib/simulation", "lib/view", "lib/case"];

export const ROOMS: readonly Room[] = [
  { place: "lib/base", holds: "time, results, assertions", from: [], packages: [], pure: true },
  { place: "lib/engine/bytes", holds: "where bytes come from", from: ["lib/base"], packages: [], pure: true },
  {
    place: "lib/engine/samples",
    holds: "files to edges",
    from: ["lib/base", "lib/engine/bytes", "lib/engine/channels"],
    packages: ["papaparse"],
    pure: true,
  },
  {
    place: "lib/engine/channels",
    holds: "which column is which line",
    from: ["lib/base"],
    typesFrom: ["lib/engine/samples"],
    packages: [],
    pure: true,
  },
  {
    place: "lib/engine/bits",
    holds: "edges to conditions and bits",
    from: ["lib/base", "lib/engine/samples"],
    packages: [],
    pure: true,
  },
  {
    place: "lib/engine/bus",
    holds: "bits to transactions",
    from: ["lib/base", "lib/engine/samples", "lib/engine/bits"],
    typesFrom: ["lib/engine"],
    packages: [],
    pure: true,
  },
  {
    place: "lib/engine/archive",
    holds: "edges packed for storage",
    from: ["lib/base", "lib/engine/bytes", "lib/engine/samples", "lib/engine/bits", "lib/engine/bus"],
    packages: ["zod"],
    pure: true,
  },
  { place: "lib/engine", holds: "the stair from edges to transactions", from: ["lib/base", ...ENGINE], packages: [], pure: true },
  { place: "lib/limits", holds: "published limits, measurements", from: ["lib/base", ...ENGINE], packages: [], pure: true },
  {
    place: "lib/forensics",
    holds: "controllers, stretches, contests, look-alikes",
    from: ["lib/base", ...ENGINE, "lib/limits"],
    // A contest is written in the report's own words.
    typesFrom: ["lib/diagnosis"],
    packages: [],
    pure: true,
  },
  {
    place: "lib/diagnosis",
    holds: "fault rules, the analysis, the report",
    from: ["lib/base", ...ENGINE, "lib/limits", "lib/forensics"],
    packages: ["zod"],
    pure: true,
  },
  {
    place: "lib/simulation",
    holds: "simulated buses",
    from: ["lib/base", "lib/engine/samples"],
    typesFrom: ENGINE,
    packages: [],
    pure: true,
  },
  {
    place: "lib/view",
    holds: "scenes, filters, formatting",
    from: ["lib/base", ...ENGINE, "lib/forensics", "lib/diagnosis"],
    packages: [],
    pure: true,
  },
  {
    place: "lib/case",
    holds: "the saved case, roles, redaction",
    from: ["lib/base", ...ENGINE, "lib/diagnosis"],
    packages: ["zod"],
    pure: true,
  },
  {
    place: "lib/server",
    holds: "everything behind a door",
    from: [...PURE, "entities", "mikro-orm.config.ts", "fixtures"],
    packages: ["*"],
  },
  {
    place: "entities",
    holds: "tables",
    from: ["lib/base", "lib/case"],
    typesFrom: ["lib/diagnosis"],
    packages: ["@mikro-orm/core"],
  },
  { place: "migrations", holds: "changes of the tables", from: [], packages: ["@mikro-orm/migrations"] },
  { place: "mikro-orm.config.ts", holds: "one database configuration", from: ["entities", "lib/server"], packages: ["*"] },
  { place: "proxy.ts", holds: "the content policy", from: ["lib/server"], packages: ["next"] },
  {
    place: "workers/stack",
    holds: "start, test, and the services they run",
    from: ["lib/server", "mikro-orm.config.ts"],
    packages: ["*"],
  },
  { place: "workers", holds: "glue: the browser's worker and the command line", from: PURE, packages: ["comlink", "node:*"] },
  {
    place: "components",
    holds: "React",
    // Of lib/server only actions: rooms.test.ts checks the directive. Of workers only the messages.
    from: [...PURE, "lib/server"],
    typesFrom: ["workers"],
    packages: ["*"],
  },
  { place: "app", holds: "routes", from: ["components", ...PURE, "lib/server"], packages: ["next", "react"] },
  {
    place: "fixtures",
    holds: "demo captures, calibration buses, and their generators",
    from: PURE,
    packages: ["node:*"],
  },
  { place: "tailwind.config.ts", holds: "the style sheet's names", from: [], packages: ["tailwindcss"] },
];

/** The top level of the repository, fixed; anything else there is a stray. */
export const TOP_LEVEL = [
  ".ci",
  ".gitignore",
  ".npmrc",
  "DEVELOPERS.md",
  "README.md",
  "app",
  "components",
  "docker-compose.minio.yml",
  "entities",
  "fixtures",
  "lib",
  "migrations",
  "mikro-orm.config.ts",
  "next.config.mjs",
  "package-lock.json",
  "package.json",
  "postcss.config.mjs",
  "proxy.ts",
  "tailwind.config.ts",
  "tests",
  "tsconfig.json",
  "workers",
];

/** The room of a file given from the root, or undefined: a file in no room. */
export function roomOf(file: string): Room | undefined {
  const inside = ROOMS.filter(({ place }) => file === place || file.startsWith(`${place}/`) || place === `${file}.ts`);
  return inside.sort((a, b) => b.place.length - a.place.length)[0];
}
