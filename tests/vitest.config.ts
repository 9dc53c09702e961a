import { defineConfig } from "vitest/config";

const root = new URL("..", import.meta.url).pathname;
const alias = { "@": root.replace(/\/$/, ""), "server-only": `${root}tests/support/empty.ts` };

// unit: pure rooms, no services. db: needs DATABASE_URL and S3_* from the test command (see DEVELOPERS.md).
export default defineConfig({
  root,
  resolve: { alias },
  test: {
    projects: [
      {
        root,
        resolve: { alias },
        test: {
          name: "unit",
          include: ["tests/unit/**/*.test.ts", "tests/unit/**/*.test.tsx", "tests/guards/**/*.test.ts"],
          setupFiles: ["tests/support/properties.ts"],
          testTimeout: 60_000,
        },
      },
      {
        root,
        resolve: { alias },
        test: {
          name: "db",
          include: ["tests/db/**/*.test.ts"],
          testTimeout: 60_000,
          hookTimeout: 60_000,
          maxWorkers: 1,
        },
      },
    ],
  },
});
