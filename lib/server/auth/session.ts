import "server-only";
import type { Cookie } from "lucia";
import type { Caller } from "@/lib/server/http/caller";
import { lucia } from "./lucia";

/** Signs a person in on this browser, working in `team`. A session the browser had before ends. */
export async function startSession(user: string, team: string | null, caller: Caller): Promise<Cookie> {
  await endRow(caller);
  // Rows of cookies that never came back; an indexed delete, and sign-ins are rare.
  await lucia().deleteExpiredSessions();
  const session = await lucia().createSession(user, { team, agent: caller.agent });
  return lucia().createSessionCookie(session.id);
}

/** Signs this browser out, on the server too. */
export async function endSession(caller: Caller): Promise<Cookie> {
  await endRow(caller);
  return lucia().createBlankSessionCookie();
}

async function endRow(caller: Caller): Promise<void> {
  const secret = lucia().readSessionCookie(caller.cookie);
  if (secret) await lucia().invalidateSession(secret);
}
