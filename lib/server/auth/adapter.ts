import "server-only";
import type { Adapter, DatabaseSession } from "lucia";
import { Session } from "@/entities/session";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import { fork } from "@/lib/server/database";
import { hashToken } from "./token";

/** What a session row carries besides its owner and its end. */
export interface SessionAttributes {
  readonly team: string | null;
  readonly agent: string;
}

export interface UserAttributes {
  readonly name: string;
  readonly email: string;
}

function stored(session: Session, id: string): DatabaseSession {
  return {
    id,
    userId: session.user.id,
    expiresAt: session.expiresAt,
    attributes: { team: session.team?.id ?? null, agent: session.agent },
  };
}

/**
 * Lucia's sessions in our tables. The database sees only the hash of a session id. Where Lucia gives the id, rows go back
 * under that id, because Lucia hands it to the next call; `getUserSessions` has only hashes to give, so what it returns
 * must never be passed to `invalidateSession` (see {@link file://./devices.ts}).
 */
export const adapter: Adapter = {
  async getSessionAndUser(id) {
    const em = await fork();
    const session = await em.findOne(Session, { id: hashToken(id) }, { populate: ["user"] });
    if (!session) return [null, null];
    const user = session.user.getEntity();
    return [stored(session, id), { id: user.id, attributes: { name: user.name, email: user.email } }];
  },

  async getUserSessions(userId) {
    const em = await fork();
    const sessions = await em.find(Session, { user: userId }, { orderBy: { createdAt: "desc" } });
    return sessions.map((session) => stored(session, session.id));
  },

  async setSession({ id, userId, expiresAt, attributes }) {
    const em = await fork();
    em.create(Session, {
      id: hashToken(id),
      user: em.getReference(User, userId),
      team: attributes.team === null ? null : em.getReference(Team, attributes.team),
      agent: attributes.agent,
      expiresAt,
    });
    await em.flush();
  },

  async updateSessionExpiration(id, expiresAt) {
    await (await fork()).nativeUpdate(Session, { id: hashToken(id) }, { expiresAt });
  },

  async deleteSession(id) {
    await (await fork()).nativeDelete(Session, { id: hashToken(id) });
  },

  async deleteUserSessions(userId) {
    await (await fork()).nativeDelete(Session, { user: userId });
  },

  async deleteExpiredSessions() {
    await (await fork()).nativeDelete(Session, { expiresAt: { $lte: new Date() } });
  },
};
