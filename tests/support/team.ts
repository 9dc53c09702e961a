import { createHash } from "node:crypto";
import { type Role, roles } from "@/lib/case/roles";
import { Browser } from "./browser";

type Handler = (request: Request, context: { params: Promise<Record<string, string>> }) => Promise<Response>;

export interface Asked {
  readonly params?: Record<string, string | number>;
  readonly query?: string;
  readonly body?: unknown;
}

/** One person of a team with the session of a real browser. */
export interface Colleague {
  readonly id: string;
  readonly browser: Browser;
}

/** A team of the tests: one person of each role. */
export type TestTeam = Readonly<Record<Role, Colleague>> & { readonly id: string };

/** Founds a team with one person of each role, all signed in. After `openTestDatabase`. */
export async function gatherTeam(name: string): Promise<TestTeam> {
  const { fork } = await import("@/lib/server/database");
  const { createUser, foundTeam } = await import("@/lib/server/auth/account");
  const { Member } = await import("@/entities/member");
  const { lucia } = await import("@/lib/server/auth/lucia");
  const em = await fork();
  const found = new Map<Role, Colleague>();
  const tag = createHash("sha256").update(`${name}${Math.random()}`).digest("hex").slice(0, 8);
  const person = (role: Role) => createUser(em, { name: `${name} ${role}`, email: `${role}@${tag}.test`, passwordHash: "none" });
  const lead = await person("lead");
  const team = await foundTeam(em, lead, name);
  for (const role of roles) {
    const user = role === "lead" ? lead : await person(role);
    if (role !== "lead") em.create(Member, { team, user, role });
    await em.flush();
    const session = await lucia().createSession(user.id, { team: team.id, agent: "tests" });
    const cookie = lucia().createSessionCookie(session.id);
    const browser = new Browser();
    browser.jar.set(cookie.name, cookie.value);
    found.set(role, { id: user.id, browser });
  }
  return { id: team.id, ...(Object.fromEntries(found) as Record<Role, Colleague>) };
}

/** Calls a route handler as this browser and reads the answer as JSON. */
export async function ask(browser: Browser, handler: Handler, method: string, asked: Asked = {}) {
  const params = Object.fromEntries(Object.entries(asked.params ?? {}).map(([name, value]) => [name, String(value)]));
  const url = `http://firstlow.test/api${asked.query ? `?${asked.query}` : ""}`;
  const response = await browser.call(handler, method, asked.body, params, url);
  const text = await response.text();
  return { status: response.status, headers: response.headers, body: text === "" ? null : JSON.parse(text) };
}
