import "server-only";
import { Session } from "@/entities/session";
import type { SignedIn } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";

/** A browser somebody is signed in on, for the account page. */
export interface Device {
  readonly id: string;
  readonly agent: string;
  readonly since: Date;
  readonly current: boolean;
}

/** Live sessions of the viewer, newest first. Ids are those of the rows: hashes, useless as cookies. */
export async function listDevices(em: EntityManager, viewer: SignedIn): Promise<Device[]> {
  const sessions = await em.find(
    Session,
    { user: viewer.user.id, expiresAt: { $gt: new Date() } },
    { orderBy: { createdAt: "desc" } },
  );
  return sessions.map((row) => ({ id: row.id, agent: row.agent, since: row.createdAt, current: row.id === viewer.sessionId }));
}

/** Signs out one other browser of the viewer, or all others when no id is given. Returns how many were signed out. */
export function endDevices(em: EntityManager, viewer: SignedIn, id?: string): Promise<number> {
  const other = { $ne: viewer.sessionId ?? "" };
  return em.nativeDelete(Session, { user: viewer.user.id, id: id === undefined ? other : { ...other, $eq: id } });
}
