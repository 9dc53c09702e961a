import "server-only";
import { createHash, randomBytes } from "node:crypto";

/** A secret for a link: 256 random bits in 43 characters that need no escaping in an address. */
export function newToken(): string {
  return randomBytes(32).toString("base64url");
}

/** What the database keeps instead of a secret. Plain SHA-256 will do: the secrets are random, so nothing can be guessed. */
export function hashToken(token: string): string {
  return createHash("sha256").update(token).digest("hex");
}
