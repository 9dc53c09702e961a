import "server-only";
import { createHmac, timingSafeEqual } from "node:crypto";
import type { Share } from "@/entities/share";
import { settings } from "@/lib/server/settings";

/** 32 random bytes in base64url; anything else in the address cannot be a link of ours and is not looked up. */
export const SECRET = /^[A-Za-z0-9_-]{43}$/;

/**
 * Proof that the passphrase of a link was given, for the cookie of this link alone. The key is the stored argon2id string,
 * which never leaves the server: the proof cannot be made without it, and dies when the passphrase is changed.
 */
function proofOf(share: Pick<Share, "id" | "passphraseHash">): string {
  return createHmac("sha256", share.passphraseHash ?? "")
    .update(share.id)
    .digest("base64url");
}

function cookieName(share: Pick<Share, "id">): string {
  return `firstlow_link_${share.id.replaceAll("-", "")}`;
}

/** Set-Cookie line after the right passphrase; gone with the browser's session. */
export function proofCookie(share: Pick<Share, "id" | "passphraseHash">): string {
  const secure = settings().app.secureCookies ? "; Secure" : "";
  return `${cookieName(share)}=${proofOf(share)}; Path=/; HttpOnly; SameSite=Lax${secure}`;
}

/** Whether the request's Cookie header proves the passphrase. */
export function proven(share: Pick<Share, "id" | "passphraseHash">, cookies: string): boolean {
  const wanted = Buffer.from(proofOf(share));
  return cookies.split(";").some((pair) => {
    const [name, value] = pair.trim().split("=", 2);
    if (name !== cookieName(share) || value === undefined) return false;
    const given = Buffer.from(value);
    return given.length === wanted.length && timingSafeEqual(given, wanted);
  });
}
