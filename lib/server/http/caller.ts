import "server-only";
import { randomUUID } from "node:crypto";
import { verifyRequestOrigin } from "lucia";
import { settings } from "@/lib/server/settings";
import { Refusal } from "./problem";

/** Who knocks, as the request's headers tell it; pages, actions and route handlers read it from the same place. */
export interface Caller {
  readonly requestId: string;
  readonly cookie: string;
  readonly origin: string | null;
  readonly host: string | null;
  readonly agent: string;
  /** Network address for counting tries. A caller without a proxy in front can claim any, so nothing is granted by it. */
  readonly address: string;
}

interface ReadableHeaders {
  get(name: string): string | null;
}

/** The caller of a request. */
export function readCaller(headers: ReadableHeaders): Caller {
  return {
    requestId: randomUUID(),
    cookie: headers.get("cookie") ?? "",
    origin: headers.get("origin"),
    host: headers.get("host"),
    agent: (headers.get("user-agent") ?? "").slice(0, 300),
    address: callerAddress(headers.get("x-forwarded-for"), settings().app.proxyHops),
  };
}

/** The address that many trusted proxies ago; each of them appended the one it was called from. */
export function callerAddress(forwarded: string | null, proxyHops: number): string {
  const chain = (forwarded ?? "").split(",").map((part) => part.trim());
  const at = Math.max(0, chain.length - Math.max(1, proxyHops));
  return chain[at] || "unknown";
}

/** Refuses a change asked for by a page of another site. Browsers send Origin with every POST, so none is refused too. */
export function checkOrigin(caller: Caller): void {
  const ours = [settings().app.url, ...(caller.host ? [caller.host] : [])];
  if (!verifyRequestOrigin(caller.origin ?? "", ours)) {
    throw new Refusal("origin-refused", { detail: `origin ${caller.origin ?? "none"}` });
  }
}
