// Reading a sampled CSV in Chromium, on the front door of the built application: how soon the first transactions stand on the
// page, how long the whole takes beside a worker that only reads the file, how much memory the page's process takes at most,
// and how long the page ever stands still. Nothing is mocked; no database is needed, as a guest's page asks none.

import { readFile } from "node:fs/promises";
import path from "node:path";
import { type Browser, chromium } from "@playwright/test";
import { openCsv } from "../../lib/engine/samples/csv";
import { pathSource } from "../../workers/path-source";
import { build } from "../../workers/stack/build";
import { findProgram } from "../../workers/stack/debian";
import { anyPort } from "../../workers/stack/port";
import { type Service, serve } from "../../workers/stack/process";
import { benchFile } from "./csv-data";
import { median, type Row, type Suite } from "./measure";

const ROOT = path.resolve(import.meta.dirname, "../..");
const DIST = ".next-test";
const ROUNDS = Number(process.env.FIRSTLOW_BENCH_ROUNDS ?? 3);
const MEGA = 1_000_000;
const SAMPLE_MS = 15;
/** Nobody has picked a file sooner after the page came; its decoder waits ready by then on a machine that is not busy otherwise. */
const PICKING_MS = 2000;

/** What one reading showed; times in ms after the file was picked, memory in bytes above an empty page. */
interface Reading {
  readonly first: number;
  readonly whole: number;
  /** Longest time between two frames, from picking to the end. */
  readonly still: number;
  readonly memory: number;
}

/** Runs in the page before its scripts: notes the moment a file is picked and what each frame after it finds. */
function watch(): void {
  const seen = { picked: 0, first: 0, whole: 0, still: 0 };
  Object.assign(window, { firstlowBench: seen });
  document.addEventListener(
    "change",
    (event) => {
      if (!(event.target instanceof HTMLInputElement) || event.target.type !== "file") return;
      seen.picked = performance.now();
      let last = seen.picked;
      const frame = (): void => {
        const now = performance.now();
        seen.still = Math.max(seen.still, now - last);
        last = now;
        if (seen.first === 0 && document.querySelector("[id^=transaction-]") !== null) seen.first = now;
        // The limits can only be looked at once everything was read and measured.
        const tabs = [...document.querySelectorAll("[role=tab]")];
        if (tabs.some((tab) => tab.textContent?.startsWith("Limits"))) seen.whole = now;
        else requestAnimationFrame(frame);
      };
      requestAnimationFrame(frame);
    },
    true,
  );
}

/** Milliseconds until a worker has read a picked file and thrown it away. */
function readOnly(): Promise<number> {
  const input = document.querySelector("input");
  const file = input?.files?.[0];
  if (!file) throw new Error("no file was picked");
  const body = `onmessage = async ({ data }) => {
    const reader = data.stream().getReader();
    let bytes = 0;
    for (let next = await reader.read(); !next.done; next = await reader.read()) bytes += next.value.length;
    postMessage(bytes);
  }`;
  return new Promise((resolve, reject) => {
    const began = performance.now();
    const worker = new Worker(URL.createObjectURL(new Blob([body], { type: "text/javascript" })));
    worker.onmessage = ({ data }) => {
      worker.terminate();
      if (data === file.size) resolve(performance.now() - began);
      else reject(new Error(`${data} bytes were read`));
    };
    worker.postMessage(file);
  });
}

/** The application, served to guests: its services are never asked, so their settings lead nowhere. */
async function serveFrontDoor(): Promise<{ address: string; service: Service }> {
  await build(ROOT, DIST, true);
  const port = await anyPort();
  const address = `http://127.0.0.1:${port}`;
  const nowhere = "127.0.0.1:9";
  const settings = {
    NODE_ENV: "production",
    FIRSTLOW_DIST: DIST,
    NEXT_TELEMETRY_DISABLED: "1",
    APP_URL: address,
    DATABASE_URL: `postgresql://nobody@${nowhere}/none`,
    S3_ENDPOINT: `http://${nowhere}`,
    S3_BUCKET: "none",
    S3_ACCESS_KEY: "none",
    S3_SECRET_KEY: "none",
    SMTP_URL: `smtp://${nowhere}`,
    MAIL_FROM: "nobody@firstlow.invalid",
  };
  const args = ["node_modules/next/dist/bin/next", "start", "-H", "127.0.0.1", "-p", String(port)];
  const env = { ...process.env, ...settings } as NodeJS.ProcessEnv;
  const command = { name: "the application", file: process.execPath, args, cwd: ROOT, env };
  const service = await serve(command, path.join(ROOT, "tests/.output/bench-application.log"));
  for (let tries = 0; tries < 600; tries += 1) {
    if ((await fetch(address).catch(() => null))?.ok) return { address, service };
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  await service.stop();
  throw new Error("the application did not answer");
}

/** Anonymous and shared memory of the process that holds most, bytes: the page's, as the browser's spare ones are empty. */
async function most(pids: readonly number[]): Promise<number> {
  return Math.max(...(await Promise.all(pids.map(held))));
}

/** What one process holds now, bytes; 0 once it is gone. */
async function held(pid: number): Promise<number> {
  const status = await readFile(`/proc/${pid}/status`, "utf8").catch(() => "");
  const kilobytes = (name: string) => Number(new RegExp(`^${name}:\\s+(\\d+) kB`, "m").exec(status)?.[1] ?? 0);
  return (kilobytes("RssAnon") + kilobytes("RssShmem")) * 1024;
}

async function renderers(browser: Browser): Promise<number[]> {
  const session = await browser.newBrowserCDPSession();
  const { processInfo } = await session.send("SystemInfo.getProcessInfo");
  await session.detach();
  return processInfo.filter(({ type }) => type === "renderer").map(({ id }) => id);
}

async function emptyPage(browser: Browser, address: string): Promise<number> {
  const context = await browser.newContext();
  // An empty document of the same site, so that the process is of the same kind.
  await context.route("**/empty", (route) =>
    route.fulfill({ contentType: "text/html", body: "<!doctype html><title>-</title>" }),
  );
  const page = await context.newPage();
  await page.goto(`${address}/empty`);
  await page.waitForTimeout(500);
  const bytes = await most(await renderers(browser));
  await context.close();
  return bytes;
}

async function reading(browser: Browser, address: string, file: string, empty: number): Promise<Reading> {
  const context = await browser.newContext();
  // The compiler that runs this suite marks inner functions with a helper of its own, which the page must have too.
  await context.addInitScript({ content: `globalThis.__name ??= (made) => made; (${watch})();` });
  const page = await context.newPage();
  await page.goto(address);
  // Its scripts answer once the name of this button says which theme the system wants.
  await page.getByRole("button", { name: /^Theme: (paper|night)/ }).waitFor();
  await page.waitForLoadState("networkidle");
  await page.waitForTimeout(PICKING_MS);
  const pids = await renderers(browser);
  let peak = 0;
  const meter = setInterval(() => {
    void most(pids).then((bytes) => {
      peak = Math.max(peak, bytes);
    });
  }, SAMPLE_MS);
  try {
    await page.getByLabel("pick a file").setInputFiles(file);
    const found = await page.waitForFunction(
      () => {
        const { firstlowBench } = window as unknown as { firstlowBench: { whole: number } };
        return firstlowBench.whole > 0 ? firstlowBench : null;
      },
      undefined,
      { timeout: 300_000, polling: 100 },
    );
    const { picked, first, whole, still } = (await found.jsonValue()) as Record<"picked" | "first" | "whole" | "still", number>;
    if (first === 0 || first > whole) throw new Error("no transaction stood on the page");
    return { first: first - picked, whole: whole - picked, still, memory: peak - empty };
  } finally {
    clearInterval(meter);
    await context.close();
  }
}

async function readingAlone(browser: Browser, file: string): Promise<number> {
  const context = await browser.newContext();
  const page = await context.newPage();
  await page.setContent('<input type="file">');
  await page.locator("input").setInputFiles(file);
  const ms = await page.evaluate(readOnly);
  await context.close();
  return ms;
}

async function edgesOf(file: string): Promise<number> {
  const opened = await openCsv(await pathSource(file), {}, false);
  if (!opened.ok) throw new Error(opened.problem.message);
  let edges = 0;
  const count = (block: { length: number }): void => {
    edges += block.length;
  };
  const read = await opened.value.read({ edges: count, tap: () => undefined, progress: () => undefined });
  if (!read.ok) throw new Error(read.problem.message);
  return edges;
}

async function measure(browser: Browser, address: string): Promise<Row[]> {
  const file = await benchFile("digital");
  const megabytes = Number(/-(\d+)\.csv$/.exec(file)?.[1]) / MEGA;
  const edges = await edgesOf(file);
  const empty = await emptyPage(browser, address);
  const readings: Reading[] = [];
  const alone: number[] = [];
  // One round to warm up, as everywhere in this folder.
  for (let round = 0; round <= ROUNDS; round += 1) {
    const spent = await readingAlone(browser, file);
    const seen = await reading(browser, address, file, empty);
    if (round === 0) continue;
    alone.push(spent);
    readings.push(seen);
  }
  const middle = (pick: (one: Reading) => number) => median(readings.map(pick));
  const what = (words: string) => `${words}, ${megabytes} MB of samples`;
  const bound = (goal: string, words: string, value: number, limit: number, unit = "ms"): Row => ({
    goal,
    what: what(words),
    ms: value,
    baseline: "the goal",
    baselineMs: limit,
    unit,
    sense: "at most",
    limit: 1,
  });
  const whole = middle((one) => one.whole);
  return [
    bound(
      "6",
      "first transactions on the page",
      middle((one) => one.first),
      250,
    ),
    bound("6", "decoded and measured", whole, (1500 * megabytes) / 200),
    {
      goal: "6",
      what: what("decoded and measured"),
      ms: whole,
      baseline: "a worker that only reads the file",
      baselineMs: median(alone),
      sense: "at most",
      limit: 4,
    },
    bound(
      "7",
      `peak memory at ${(edges / MEGA).toFixed(1)} M edges`,
      middle((one) => one.memory) / MEGA,
      (20 * edges) / MEGA + 120,
      "MB",
    ),
    bound(
      "8",
      "longest time without a frame",
      middle((one) => one.still),
      50,
    ),
  ];
}

export const suite: Suite = {
  name: "browser",
  async run() {
    const executablePath = process.env.FIRSTLOW_CHROMIUM ?? (await findProgram("chromium"));
    if (!executablePath)
      throw new Error("Chromium is not installed; apt-get install chromium, or give its path as FIRSTLOW_CHROMIUM");
    const { address, service } = await serveFrontDoor();
    const browser = await chromium.launch({ executablePath, args: ["--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage"] });
    try {
      return await measure(browser, address);
    } finally {
      await browser.close();
      await service.stop();
    }
  },
};
