import "server-only";
import { type EntityManager, MikroORM } from "@mikro-orm/postgresql";
import { ormConfig } from "@/mikro-orm.config";

// The framework loads this module once for pages and once for route handlers; the process still keeps one pool.
const shared = globalThis as typeof globalThis & { firstlowOrm?: Promise<MikroORM> };

/** The ORM of this process, connected on first use. */
export function orm(): Promise<MikroORM> {
  shared.firstlowOrm ??= MikroORM.init(ormConfig()).catch((error: unknown) => {
    // A database that was away at the first request may be back at the second.
    shared.firstlowOrm = undefined;
    throw error;
  });
  return shared.firstlowOrm;
}

/** A fresh unit of work; one per request, never shared between two. */
export async function fork(): Promise<EntityManager> {
  return (await orm()).em.fork();
}

/** Ends the pool; for tests and commands, which would otherwise keep the process alive. */
export async function closeDatabase(): Promise<void> {
  const open = shared.firstlowOrm;
  shared.firstlowOrm = undefined;
  await (await open)?.close();
}

export type { EntityManager };
