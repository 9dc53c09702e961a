import { execFile } from "node:child_process";
import { randomBytes } from "node:crypto";
import { readdirSync } from "node:fs";
import path from "node:path";
import { promisify } from "node:util";
import { Client } from "pg";

const root = path.resolve(import.meta.dirname, "../..");

/** A database for one test file alone, at the newest migration; the application's settings point at it. */
export interface TestDatabase {
  readonly url: string;
  /** Plain SQL, past every check of the application: for looking at what is really stored. */
  query<Row extends Record<string, unknown>>(sql: string, values?: readonly unknown[]): Promise<Row[]>;
  /** Closes the application's pool and drops the database. */
  close(): Promise<void>;
}

/** Copies the database of DATABASE_URL, migrating that first where needed. Sets what settings() wants and nothing gave. */
export async function openTestDatabase(): Promise<TestDatabase> {
  const base = process.env.DATABASE_URL;
  if (!base) throw new Error("Database tests need DATABASE_URL: a PostgreSQL database that may be migrated and copied.");
  await migrateOnce(base);
  const name = `firstlow_test_${randomBytes(6).toString("hex")}`;
  const url = withDatabase(base, name);
  await administer(base, `create database "${name}" template "${databaseOf(base)}"`);
  process.env.DATABASE_URL = url;
  giveSettings();
  const client = new Client({ connectionString: url });
  await client.connect();
  return {
    url,
    async query<Row extends Record<string, unknown>>(sql: string, values: readonly unknown[] = []) {
      return (await client.query<Row>(sql, [...values])).rows;
    },
    async close() {
      const { closeDatabase } = await import("@/lib/server/database");
      await closeDatabase();
      await client.end();
      process.env.DATABASE_URL = base;
      await administer(base, `drop database "${name}" with (force)`);
    },
  };
}

/** The address that tests know is set; the rest only where neither the test command nor the test gave it. */
function giveSettings(): void {
  process.env.APP_URL = "http://firstlow.test";
  delete process.env.SESSION_SECURE;
  delete process.env.PROXY_HOPS;
  process.env.SMTP_URL ??= "smtp://127.0.0.1:9";
  process.env.MAIL_FROM ??= "Firstlow <firstlow@firstlow.test>";
  process.env.S3_ENDPOINT ??= "http://127.0.0.1:9";
  process.env.S3_BUCKET ??= "firstlow";
  process.env.S3_ACCESS_KEY ??= "test";
  process.env.S3_SECRET_KEY ??= "test";
}

/** The migrator wants plain Node, so it runs in a process of its own (inside Vitest it cannot load its files). */
async function migrateOnce(url: string): Promise<void> {
  const wanted = readdirSync(path.join(root, "migrations")).filter((file) => file.endsWith(".ts")).length;
  if ((await migrationsDone(url)) === wanted) return;
  const args = ["--import", "tsx", path.join(root, "workers/stack/migrate.ts")];
  await promisify(execFile)(process.execPath, args, { cwd: root, env: { ...process.env, DATABASE_URL: url } });
}

async function migrationsDone(url: string): Promise<number> {
  const client = new Client({ connectionString: url });
  await client.connect();
  try {
    const { rows } = await client.query<{ done: string | null }>("select to_regclass('mikro_orm_migrations') as done");
    if (rows[0].done === null) return 0;
    return Number((await client.query<{ n: string }>("select count(*) as n from mikro_orm_migrations")).rows[0].n);
  } finally {
    await client.end();
  }
}

async function administer(base: string, statement: string): Promise<void> {
  const client = new Client({ connectionString: withDatabase(base, "postgres") });
  await client.connect();
  try {
    await client.query(statement);
  } finally {
    await client.end();
  }
}

function databaseOf(url: string): string {
  return decodeURIComponent(new URL(url).pathname.slice(1));
}

function withDatabase(url: string, name: string): string {
  const changed = new URL(url);
  changed.pathname = `/${name}`;
  return changed.href;
}
