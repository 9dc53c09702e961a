import "server-only";
import { Lucia, TimeSpan } from "lucia";
import { settings } from "@/lib/server/settings";
import { adapter, type SessionAttributes, type UserAttributes } from "./adapter";

function create() {
  return new Lucia(adapter, {
    // Slides: a session used in its second half starts its thirty days anew.
    sessionExpiresIn: new TimeSpan(30, "d"),
    sessionCookie: {
      name: "firstlow_session",
      // The row decides when a session ends. A page visit can extend the row but not the cookie, so a cookie with the
      // row's date would sign people out at the first thirty days however often they come.
      expires: false,
      attributes: { secure: settings().app.secureCookies, sameSite: "lax", path: "/" },
    },
    getSessionAttributes: ({ team, agent }) => ({ team, agent }),
    getUserAttributes: ({ name, email }) => ({ name, email }),
  });
}

let made: ReturnType<typeof create> | undefined;

/** Lucia, made on first use because its cookie follows the settings. */
export function lucia(): ReturnType<typeof create> {
  made ??= create();
  return made;
}

declare module "lucia" {
  interface Register {
    Lucia: ReturnType<typeof create>;
    DatabaseUserAttributes: UserAttributes;
    DatabaseSessionAttributes: SessionAttributes;
  }
}
