import "server-only";
import { Member } from "@/entities/member";
import { Session } from "@/entities/session";
import { lucia } from "@/lib/server/auth/lucia";
import { hashToken } from "@/lib/server/auth/token";
import { type EntityManager, fork } from "@/lib/server/database";
import { type GuestViewer, guest, type SignedIn } from "./viewer";

/**
 * Whoever the session cookie belongs to; a guest where there is none or it has ended. The role is read anew every time,
 * so a changed or withdrawn membership counts from the next request on.
 */
export async function settleSession(cookieHeader: string): Promise<SignedIn | GuestViewer> {
  const secret = lucia().readSessionCookie(cookieHeader);
  if (!secret) return guest;
  const { user, session } = await lucia().validateSession(secret);
  if (!user) return guest;
  const person = { id: user.id, name: user.name, email: user.email };
  const sessionId = hashToken(secret);
  const member = await currentMember(await fork(), user.id, session.team, sessionId);
  if (!member) return { kind: "person", user: person, sessionId };
  const team = member.team.getEntity();
  return { kind: "member", user: person, team: { id: team.id, name: team.name }, role: member.role, sessionId };
}

/** Membership in the session's team, or else the oldest one, which the session then keeps. */
async function currentMember(em: EntityManager, user: string, team: string | null, sessionId: string) {
  const options = { populate: ["team"], orderBy: { joinedAt: "asc", id: "asc" } } as const;
  const chosen = team ? await em.findOne(Member, { user, team }, options) : null;
  if (chosen) return chosen;
  const oldest = await em.findOne(Member, { user }, options);
  if (oldest) await em.nativeUpdate(Session, { id: sessionId }, { team: oldest.team.id });
  return oldest;
}
