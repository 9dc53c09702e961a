import "server-only";
import { OptimisticLockError, UniqueConstraintViolationException } from "@mikro-orm/core";
import type { EntityManager } from "./database";
import { type FieldMessages, Refusal } from "./http/problem";

interface Collisions {
  /** What to say where a unique key is taken; told which constraint it was. */
  readonly taken: (constraint: string) => { readonly words: string; readonly fields: FieldMessages };
  /** For versioned rows: what stands there now, read anew. */
  readonly theirs?: () => Promise<unknown>;
}

/** Flushes, and turns the two collisions a database can see into refusals: a name that is taken, a row changed meanwhile. */
export async function save(em: EntityManager, collisions: Collisions): Promise<void> {
  try {
    await em.flush();
  } catch (error) {
    if (error instanceof UniqueConstraintViolationException) {
      throw new Refusal("conflict", collisions.taken("constraint" in error ? String(error.constraint) : error.message));
    }
    if (error instanceof OptimisticLockError && collisions.theirs)
      throw new Refusal("stale", { theirs: await collisions.theirs() });
    throw error;
  }
}
