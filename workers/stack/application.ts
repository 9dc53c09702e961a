// In: the sources, a port and settings. Out: the application prepared (migrated, seeded, built) and served on loopback.

import path from "node:path";
import { Complaint } from "./complaint";
import { run, type Service, serve } from "./process";

const NEXT = "node_modules/next/dist/bin/next";
const READY_WITHIN = 90_000;

/** Settings on top of an outer environment; a NODE_ENV of the caller's would change what the framework does. */
export function applicationEnvironment(settings: Readonly<Record<string, string>>, outer = process.env): NodeJS.ProcessEnv {
  return {
    ...outer,
    ...settings,
    NODE_ENV: "production",
    NEXT_TELEMETRY_DISABLED: "1",
    AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: "true",
  };
}

export async function migrate(root: string, env: NodeJS.ProcessEnv): Promise<void> {
  const args = ["--import", "tsx", path.join(root, "workers/stack/migrate.ts")];
  const done = await run({ name: "the migration", file: process.execPath, args, cwd: root, env, limit: 300_000 });
  if (done.code === 0) return;
  const unreachable = /ECONNREFUSED|ENOTFOUND|EAI_AGAIN|password authentication failed|does not exist|ETIMEDOUT/.test(
    done.output,
  );
  throw new Complaint(
    `The database could not be brought up to date:\n${tail(done.output, 12)}`,
    unreachable
      ? "Check DATABASE_URL: host, port, user, password, and that the database exists."
      : "Nothing was started. The data is as it was before.",
  );
}

/** What the demo team can sign in with, as printed for people. */
export interface DemoAccount {
  readonly role: string;
  readonly email: string;
  readonly password: string;
}

/** Makes the demo team; harmless when it is there already. */
export async function seed(root: string, env: NodeJS.ProcessEnv): Promise<DemoAccount[]> {
  const args = ["--conditions=react-server", "--import", "tsx", path.join(root, "workers/stack/seed.ts")];
  const done = await run({ name: "the demo team", file: process.execPath, args, cwd: root, env, limit: 300_000 });
  const line = done.output
    .trim()
    .split("\n")
    .findLast((text) => text.startsWith("accounts "));
  if (done.code === 0 && line) return JSON.parse(line.slice("accounts ".length));
  throw new Complaint(
    `The demo team could not be made:\n${tail(done.output, 20)}`,
    "Start again once that is put right; FIRSTLOW_DEMO=no starts without it.",
  );
}

/** Serves a finished build; resolves when it answers its health check. */
export async function serveApplication(
  root: string,
  dist: string,
  port: number,
  env: NodeJS.ProcessEnv,
  log: string,
): Promise<Service> {
  const args = [NEXT, "start", "-H", "127.0.0.1", "-p", String(port)];
  const command = { name: "the application", file: process.execPath, args, cwd: root, env: { ...env, FIRSTLOW_DIST: dist } };
  const service = await serve(command, log);
  let died = false;
  service.process.once("exit", () => {
    died = true;
  });
  const health = `http://127.0.0.1:${port}/api/health`;
  let said = "no answer";
  for (const began = Date.now(); Date.now() - began < READY_WITHIN && !died; ) {
    const answer = await fetch(health, { signal: AbortSignal.timeout(10_000) }).catch(() => undefined);
    if (answer?.ok) return service;
    if (answer) said = `${answer.status} ${(await answer.text()).slice(0, 300)}`;
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  await service.stop();
  throw new Complaint(
    died ? "The application ended while it was starting." : `The application does not get healthy: ${said}.`,
    `Its output is in ${log}.`,
  );
}

function tail(text: string, lines: number): string {
  return text.trim().split("\n").slice(-lines).join("\n");
}
