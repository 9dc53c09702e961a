import "server-only";
import { Reset } from "@/entities/reset";
import { Session } from "@/entities/session";
import { User } from "@/entities/user";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { type Letter, resetLetter } from "@/lib/server/mail/letters";
import { hashPassword } from "./password";
import { hashToken, newToken } from "./token";

const lifeMinutes = 60;

/** Makes a reset link for the account of this address, ready to mail; null where there is no such account. */
export async function askReset(em: EntityManager, email: string): Promise<Letter | null> {
  const user = await em.findOne(User, { email });
  if (!user) return null;
  const token = newToken();
  // Only the newest link works: a person who asks twice reads the second mail.
  await em.transactional(async (tx) => {
    await tx.nativeDelete(Reset, { $or: [{ user: user.id }, { expiresAt: { $lte: new Date() } }] });
    tx.create(Reset, { tokenHash: hashToken(token), user, expiresAt: new Date(Date.now() + lifeMinutes * 60_000) });
  });
  return resetLetter(user, token, lifeMinutes);
}

/** Whether a reset link still works; looking does not use it up, as mail scanners open links too. */
export async function resetOpen(em: EntityManager, token: string): Promise<boolean> {
  return (await em.count(Reset, { tokenHash: hashToken(token), expiresAt: { $gt: new Date() } })) > 0;
}

/** Uses a reset link once: sets the password and signs out every browser. Returns whose it was. */
export async function useReset(em: EntityManager, token: string, password: string): Promise<User> {
  const passwordHash = await hashPassword(password);
  return em.transactional(async (tx) => {
    const reset = await tx.findOne(Reset, { tokenHash: hashToken(token) }, { populate: ["user"] });
    // The delete, not the look, decides between two tries at once.
    const taken = await tx.nativeDelete(Reset, { tokenHash: hashToken(token), expiresAt: { $gt: new Date() } });
    if (!reset || taken === 0) throw new Refusal("reset-unusable");
    const user = reset.user.getEntity();
    await tx.nativeUpdate(User, { id: user.id }, { passwordHash });
    await tx.nativeDelete(Session, { user: user.id });
    await tx.nativeDelete(Reset, { user: user.id });
    return user;
  });
}
