import { Migrator } from "@mikro-orm/migrations";
import { defineConfig, type Options } from "@mikro-orm/postgresql";
import { entities } from "./entities/all";
import { databaseSettings } from "./lib/server/settings";

/** One configuration for the application, the migrations and the command line. Nothing connects while it is made. */
export function ormConfig(): Options {
  const { url, pool } = databaseSettings();
  return defineConfig({
    clientUrl: url,
    entities,
    extensions: [Migrator],
    discovery: { disableDynamicFileAccess: true },
    migrations: { path: "./migrations", pathTs: "./migrations", snapshotName: ".snapshot", emit: "ts" },
    forceUtcTimezone: true,
    // Ids exist from the moment a row is made, so that the audit line of the same transaction can name it.
    processOnCreateHooksEarly: true,
    pool: { min: 0, max: pool },
  });
}

export default ormConfig;
