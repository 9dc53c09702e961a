import "server-only";
import { UniqueConstraintViolationException } from "@mikro-orm/core";
import { Invitation } from "@/entities/invitation";
import { Member } from "@/entities/member";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import type { Role } from "@/lib/case/roles";
import { type MemberViewer, type SignedIn, within } from "@/lib/server/access/viewer";
import { record, recordBy } from "@/lib/server/audit";
import { createUser } from "@/lib/server/auth/account";
import { hashPassword } from "@/lib/server/auth/password";
import { hashToken, newToken } from "@/lib/server/auth/token";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { invitationLetter } from "@/lib/server/mail/letters";
import { post } from "@/lib/server/mail/post";

const lifeDays = 7;

/** Neither used nor withdrawn nor past its date. */
function open(now = new Date()) {
  return { acceptedAt: null, revokedAt: null, expiresAt: { $gt: now } };
}

export interface OpenInvitation {
  readonly id: string;
  readonly email: string;
  readonly role: Role;
  readonly expiresAt: Date;
}

/** Invitations of the viewer's team that can still be accepted, newest first. */
export async function listInvitations(em: EntityManager, viewer: MemberViewer): Promise<OpenInvitation[]> {
  const rows = await em.find(Invitation, { ...within(viewer), ...open() }, { orderBy: { createdAt: "desc", id: "desc" } });
  return rows.map(({ id, email, role, expiresAt }) => ({ id, email, role, expiresAt }));
}

/**
 * Mails a place in the viewer's team. An earlier open invitation of the same address is withdrawn: only the newest mail
 * works. When the mail cannot be sent the invitation is withdrawn again.
 */
export async function invite(em: EntityManager, viewer: MemberViewer, email: string, role: Role): Promise<void> {
  if ((await em.count(Member, { ...within(viewer), user: { email } })) > 0) {
    throw new Refusal("already-member", { fields: { email: "This person is already a member." } });
  }
  const token = newToken();
  const id = await em.transactional(async (tx) => {
    await tx.nativeUpdate(Invitation, { ...within(viewer), email, ...open() }, { revokedAt: new Date() });
    const invitation = tx.create(Invitation, {
      team: tx.getReference(Team, viewer.team.id),
      email,
      role,
      tokenHash: hashToken(token),
      invitedBy: tx.getReference(User, viewer.user.id),
      expiresAt: new Date(Date.now() + lifeDays * 24 * 3_600_000),
    });
    recordBy(tx, viewer, "member.invited", invitation.id, { email, role });
    return invitation.id;
  });
  try {
    await post(invitationLetter({ email, role, team: viewer.team.name, from: viewer.user.name, token, days: lifeDays }));
  } catch (error) {
    await revokeInvitation(em, viewer, id);
    throw error;
  }
}

/** Withdraws an open invitation; its link stops working at once. */
export async function revokeInvitation(em: EntityManager, viewer: MemberViewer, id: string): Promise<void> {
  await em.transactional(async (tx) => {
    const revoked = await tx.nativeUpdate(Invitation, { ...within(viewer), id, ...open() }, { revokedAt: new Date() });
    if (revoked === 0) throw new Refusal("not-found", { detail: "invitation" });
    recordBy(tx, viewer, "invitation.revoked", id);
  });
}

/** What the holder of an invitation link is shown. */
export interface Offer {
  readonly team: string;
  readonly email: string;
  readonly role: Role;
  readonly from: string | null;
  /** Whether the address already has an account, which then has to sign in to accept. */
  readonly account: boolean;
}

/** The offer behind a token, or null when it can no longer be accepted. */
export async function readOffer(em: EntityManager, token: string): Promise<Offer | null> {
  const row = await em.findOne(Invitation, { tokenHash: hashToken(token), ...open() }, { populate: ["team", "invitedBy"] });
  if (!row) return null;
  const account = (await em.count(User, { email: row.email })) > 0;
  return {
    team: row.team.getEntity().name,
    email: row.email,
    role: row.role,
    from: row.invitedBy?.getEntity().name ?? null,
    account,
  };
}

/** Accepts as a new person, whose address the mail has proved. Returns who and which team. */
export async function joinAsNew(
  em: EntityManager,
  token: string,
  name: string,
  password: string,
): Promise<{ user: string; team: string }> {
  const passwordHash = await hashPassword(password);
  return em.transactional(async (tx) => {
    const invitation = await take(tx, token);
    const user = await createUser(tx, { name, email: invitation.email, passwordHash });
    await join(tx, invitation, user);
    return { user: user.id, team: invitation.team.id };
  });
}

/** Accepts as the signed-in person; the invitation has to be for that person's address. Returns the team. */
export async function joinAs(em: EntityManager, token: string, viewer: SignedIn): Promise<string> {
  return em.transactional(async (tx) => {
    const invitation = await take(tx, token);
    if (invitation.email !== viewer.user.email) {
      throw new Refusal("forbidden", {
        words: `This invitation is for ${invitation.email}, and you are signed in as ${viewer.user.email}. Sign out first.`,
      });
    }
    await join(tx, invitation, await tx.findOneOrFail(User, { id: viewer.user.id }));
    return invitation.team.id;
  });
}

/** Uses an invitation up; of two tries at once one gets it. */
async function take(em: EntityManager, token: string): Promise<Invitation> {
  const tokenHash = hashToken(token);
  const taken = await em.nativeUpdate(Invitation, { tokenHash, ...open() }, { acceptedAt: new Date() });
  if (taken === 0) throw new Refusal("invitation-unusable");
  return em.findOneOrFail(Invitation, { tokenHash });
}

async function join(em: EntityManager, invitation: Invitation, user: User): Promise<void> {
  const team = em.getReference(Team, invitation.team.id);
  em.create(Member, { team, user, role: invitation.role });
  const detail = { email: invitation.email, role: invitation.role };
  record(em, { team, actor: user, actorName: user.name, event: "member.joined", subject: user.id, detail });
  try {
    await em.flush();
  } catch (error) {
    if (error instanceof UniqueConstraintViolationException) throw new Refusal("already-member");
    throw error;
  }
}
