// In: nothing of the environment. Out: throw-away services for tests: a database without durability, storage with planned faults, a mailbox.

import { chmod, mkdtemp, rm } from "node:fs/promises";
import path from "node:path";
import { applicationEnvironment, migrate } from "./application";
import { exists } from "./debian";
import { startServices } from "./services";

export interface Testbed {
  readonly home: string;
  /** What a test reads: the application's settings and where the fakes listen. `database` names a fresh copy of the migrated one. */
  environment(database: string): Promise<NodeJS.ProcessEnv>;
  /** Stops everything and removes every trace. */
  close(): Promise<void>;
}

const SETTINGS = /^(DATABASE_|S3_|SMTP_|MAIL_|APP_URL$|PORT$|SESSION_SECURE$|PROXY_HOPS$|FIRSTLOW_)/;

const QUIET = { NEXT_TELEMETRY_DISABLED: "1", AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: "true" };

/** Starts everything of its own, whatever settings the caller's shell has: tests must not write into somebody's database. */
export async function openTestbed(root: string, address: string): Promise<Testbed> {
  const home = await mkdtemp(path.join((await exists("/var/tmp")) ? "/var/tmp" : root, "firstlow-test-"));
  // The database server's user must be able to pass through; what lies inside is closed to it.
  await chmod(home, 0o711);
  const remove = () => rm(home, { recursive: true, force: true });
  try {
    const outer: NodeJS.ProcessEnv = Object.assign({}, process.env);
    for (const name of Object.keys(outer)) if (SETTINGS.test(name)) delete outer[name];
    const state = { storageSecret: "tests-only-secret" };
    const wish = { home, state, origins: [new URL(address).origin], environment: outer };
    const services = await startServices({ ...wish, durable: false, controls: true });
    const settings = { ...services.settings, APP_URL: address, FIRSTLOW_MAILBOX: services.mailbox?.address ?? "" };
    await migrate(root, applicationEnvironment(settings)).catch(async (error) => {
      await services.stop();
      throw error;
    });
    return {
      home,
      async environment(database) {
        await services.cluster?.createDatabase(database, "firstlow");
        const env: NodeJS.ProcessEnv = Object.assign({}, outer, settings, QUIET);
        env.DATABASE_URL = services.cluster?.url(database);
        return env;
      },
      async close() {
        await services.stop();
        await remove();
      },
    };
  } catch (error) {
    await remove();
    throw error;
  }
}
