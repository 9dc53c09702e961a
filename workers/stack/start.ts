// In: a checkout and the environment. Out: the whole product running on loopback until Ctrl-C. README.md lists the settings.

import { readFile, statfs, writeFile } from "node:fs/promises";
import path from "node:path";
import { applicationEnvironment, type DemoAccount, migrate, seed, serveApplication } from "./application";
import { build } from "./build";
import { Complaint, complain } from "./complaint";
import { type Lock, takeLock } from "./lock";
import { demandedPort, freePort } from "./port";
import { endAll, type Service } from "./process";
import { type Services, startServices } from "./services";
import { readState, writeState } from "./state";

const ROOT = path.resolve(import.meta.dirname, "../..");
const HOME = path.join(ROOT, ".firstlow");
const DIST = ".next";
const FIRST_PORT = 3000;
const NEEDED_SPACE = 300 * 1024 ** 2;

/** What has been started so far, ended in reverse order whatever happens. */
const started: { name: string; stop: () => Promise<void> }[] = [];
let stopping = false;
let ready = false;

async function main(): Promise<Service> {
  const began = performance.now();
  const state = await readState(HOME);
  const lock = await takeLock(HOME);
  started.push({ name: "lock", stop: lock.release });
  await checkSpace();
  const port = process.env.PORT ? await demandedPort(process.env.PORT) : await choosePort(state.port);
  const address = process.env.APP_URL || `http://127.0.0.1:${port}`;
  const local = [`http://127.0.0.1:${port}`, `http://localhost:${port}`];
  const origins = [...new Set([new URL(address).origin, ...local])];
  goOn();
  const services = await startServices({ home: HOME, state, origins, environment: process.env, durable: true });
  started.push({ name: "services", stop: services.stop });
  await writeState(HOME, { ...state, port: process.env.PORT ? state.port : port });
  const env = applicationEnvironment({ ...services.settings, APP_URL: address });
  goOn();
  // The build needs no service, so it runs beside the work on the database.
  const [accounts] = await Promise.all([prepare(services, env), build(ROOT, DIST, true)]);
  goOn();
  const service = await serveApplication(ROOT, DIST, port, env, path.join(HOME, "log", "application.log"));
  started.push({ name: "application", stop: service.stop });
  await announce(lock, service, address);
  introduce(address, accounts, services, (performance.now() - began) / 1000);
  return service;
}

/** Breaks a start off between two stages; within one, its child processes are ended. */
function goOn(): void {
  if (stopping) throw new Complaint("Stopped before it was ready.", "Nothing is left running.");
}

async function announce(lock: Lock, service: Service, address: string): Promise<void> {
  await lock.note({ address, child: { name: "application", pid: service.pid } });
}

async function choosePort(remembered: number | undefined): Promise<number> {
  const wishes = Array.from({ length: 20 }, (_unused, index) => FIRST_PORT + index);
  const port = await freePort(remembered, ...wishes);
  if (remembered !== undefined && port !== remembered)
    console.log(`Port ${remembered}, used last time, is taken by another program; using ${port}.`);
  return port;
}

async function checkSpace(): Promise<void> {
  const disk = await statfs(HOME);
  const free = disk.bavail * disk.bsize;
  if (free >= NEEDED_SPACE) return;
  const megabytes = Math.round(free / 1024 ** 2);
  throw new Complaint(
    `Only ${megabytes} MB are free on the disk that holds ${ROOT}.`,
    "Free about 1 GB and start again: a build and the database need it.",
  );
}

async function prepare(services: Services, env: NodeJS.ProcessEnv): Promise<DemoAccount[]> {
  await migrate(ROOT, env);
  goOn();
  return demo(services, env);
}

/** The demo team, once per database of our own. Somebody's own database gets accounts with known passwords only when asked. */
async function demo(services: Services, env: NodeJS.ProcessEnv): Promise<DemoAccount[]> {
  const wanted = process.env.FIRSTLOW_DEMO ?? (services.cluster ? "yes" : "no");
  if (wanted !== "yes") return [];
  const mark = services.cluster && path.join(services.cluster.folder, "seeded.json");
  const earlier = mark && (await readFile(mark, "utf8").catch(() => undefined));
  if (earlier) return JSON.parse(earlier);
  console.log("Making the demo team ...");
  const accounts = await seed(ROOT, env);
  if (mark) await writeFile(mark, JSON.stringify(accounts));
  return accounts;
}

function introduce(address: string, accounts: readonly DemoAccount[], services: Services, seconds: number): void {
  const lines = [`\nFirstlow is ready at ${address} (after ${seconds.toFixed(1)} s)\n`];
  if (accounts.length) {
    lines.push("  Demo accounts (known passwords: for trying out only)");
    for (const { role, email, password } of accounts) lines.push(`    ${role.padEnd(11)} ${email.padEnd(34)} ${password}`);
  }
  if (services.mailbox) lines.push(`  Mail is kept, not sent: read it at ${services.mailbox.address}`);
  lines.push(`  Data stays in ${path.relative(process.cwd(), HOME) || HOME}; Ctrl-C ends everything started here.\n`);
  console.log(lines.join("\n"));
}

async function shutDown(): Promise<void> {
  for (const { name, stop } of started.splice(0).reverse()) {
    await stop().catch((error) => console.error(`Stopping the ${name}: ${error instanceof Error ? error.message : error}`));
  }
  await endAll();
}

/** Ends everything and leaves. A start that is still under way is broken off first, so that nothing appears behind our back. */
async function finish(code: number): Promise<void> {
  if (stopping) return;
  stopping = true;
  if (!ready) await endAll();
  await running.catch(() => undefined);
  await shutDown();
  process.exit(code);
}

const running = main();
// Handled below; without this line a failure during the same tick would count as unhandled.
running.catch(() => undefined);

for (const [signal, number] of [
  ["SIGINT", 2],
  ["SIGTERM", 15],
  ["SIGHUP", 1],
] as const) {
  process.on(signal, () => {
    if (!stopping) console.log("\nStopping ...");
    void finish(signal === "SIGINT" ? 0 : 128 + number);
  });
}
process.on("uncaughtException", (error) => {
  complain(error);
  void finish(1);
});

try {
  const service = await running;
  ready = true;
  service.process.once("exit", (code) => {
    if (stopping) return;
    console.error(
      `The application ended by itself (exit code ${code}). Its output is in ${path.join(HOME, "log", "application.log")}.`,
    );
    void finish(1);
  });
} catch (error) {
  if (!stopping) complain(error);
  await finish(1);
}
