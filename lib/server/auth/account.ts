import "server-only";
import { UniqueConstraintViolationException } from "@mikro-orm/core";
import { Member } from "@/entities/member";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import type { SignedIn } from "@/lib/server/access/viewer";
import { record } from "@/lib/server/audit";
import type { EntityManager } from "@/lib/server/database";
import type { Caller } from "@/lib/server/http/caller";
import { Refusal } from "@/lib/server/http/problem";
import { forget, forgive, strike } from "@/lib/server/rate";
import { endDevices } from "./devices";
import { checkPassword, hashPassword } from "./password";

export interface SignUp {
  readonly team: string;
  readonly name: string;
  readonly email: string;
  readonly password: string;
}

/** Founds a team with a new person as its lead. Refuses with "email-taken" when the address has an account. */
export async function signUp(em: EntityManager, { team, name, email, password }: SignUp): Promise<{ user: User; team: Team }> {
  const passwordHash = await hashPassword(password);
  return em.transactional(async (tx) => {
    const user = await createUser(tx, { name, email, passwordHash });
    return { user, team: await foundTeam(tx, user, team) };
  });
}

/** A new person; the unique key, not a look beforehand, decides whether the address is free. */
export async function createUser(em: EntityManager, given: { name: string; email: string; passwordHash: string }): Promise<User> {
  const user = em.create(User, given);
  try {
    await em.flush();
  } catch (error) {
    if (error instanceof UniqueConstraintViolationException) {
      throw new Refusal("email-taken", { fields: { email: "There is already an account for this address." } });
    }
    throw error;
  }
  return user;
}

/** A new team led by `user`. */
export async function foundTeam(em: EntityManager, user: User, name: string): Promise<Team> {
  const team = em.create(Team, { name });
  em.create(Member, { team, user, role: "lead" });
  record(em, { team, actor: user, actorName: user.name, event: "team.founded", subject: team.id, detail: { name } });
  await em.flush();
  return team;
}

/**
 * The person that e-mail address and password belong to. Every try counts against the caller, the account and the pair;
 * the right password clears the pair and takes the other two back, so that only mistakes add up.
 */
export async function signIn(em: EntityManager, email: string, password: string, caller: Caller): Promise<User> {
  const pair = `${caller.address} ${email}`;
  await strike("sign-in-address", caller.address);
  await strike("sign-in-account", email);
  await strike("sign-in", pair);
  const user = await em.findOne(User, { email });
  const right = await checkPassword(user?.passwordHash ?? null, password);
  if (!user || !right) throw new Refusal("wrong-credentials");
  await Promise.all([forget("sign-in", pair), forgive("sign-in-address", caller.address), forgive("sign-in-account", email)]);
  return user;
}

export async function rename(em: EntityManager, viewer: SignedIn, name: string): Promise<void> {
  await em.nativeUpdate(User, { id: viewer.user.id }, { name });
}

/** Sets a new password and signs out every other browser of this person. */
export async function changePassword(em: EntityManager, viewer: SignedIn, current: string, next: string): Promise<void> {
  await strike("password-change", viewer.user.id);
  const user = await em.findOneOrFail(User, { id: viewer.user.id });
  if (!(await checkPassword(user.passwordHash, current))) {
    throw new Refusal("wrong-password", { fields: { currentPassword: "That is not the current password." } });
  }
  await forget("password-change", viewer.user.id);
  const passwordHash = await hashPassword(next);
  await em.transactional(async (tx) => {
    await tx.nativeUpdate(User, { id: user.id }, { passwordHash });
    await endDevices(tx, viewer);
  });
}
