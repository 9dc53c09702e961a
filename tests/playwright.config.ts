// Browser tests against the built application, in Debian's Chromium. "npm test" serves it and sets FIRSTLOW_ADDRESS and the rest;
// "npm test browser" runs only these.

import path from "node:path";
import { defineConfig } from "@playwright/test";

const output = path.resolve(import.meta.dirname, ".output");

export default defineConfig({
  testDir: "e2e",
  outputDir: path.join(output, "browser"),
  // Two cores at most are promised, and the server needs one of them.
  workers: 1,
  retries: 0,
  timeout: 60_000,
  expect: { timeout: 10_000 },
  forbidOnly: true,
  reporter: [["list"], ["json", { outputFile: path.join(output, "browser.json") }]],
  use: {
    baseURL: process.env.FIRSTLOW_ADDRESS,
    trace: "retain-on-failure",
    screenshot: "only-on-failure",
    locale: "en-GB",
    timezoneId: "UTC",
    launchOptions: {
      executablePath: process.env.FIRSTLOW_CHROMIUM || "/usr/bin/chromium",
      args: [
        "--no-sandbox",
        "--disable-gpu",
        "--disable-quic",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--disable-dev-shm-usage",
      ],
    },
  },
});
