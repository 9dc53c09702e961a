import "server-only";
import { hash, verify } from "@node-rs/argon2";

// OWASP Password Storage Cheat Sheet, argon2id: 19 MiB, two passes, one lane.
const cost = { memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const;

/** The same password typed on two keyboards may arrive as different code points. */
function normal(password: string): string {
  return password.normalize("NFKC");
}

/** argon2id in PHC string form, salted. */
export function hashPassword(password: string): Promise<string> {
  return hash(normal(password), cost);
}

let decoy: Promise<string> | undefined;

/**
 * Whether `password` made `stored`. Without a stored hash (no such account) the same work is done against a hash that
 * nothing matches, so that the time taken does not tell whether the account exists.
 */
export async function checkPassword(stored: string | null, password: string): Promise<boolean> {
  if (stored !== null) return verify(stored, normal(password));
  decoy ??= hashPassword(crypto.randomUUID());
  await verify(await decoy, normal(password));
  return false;
}
