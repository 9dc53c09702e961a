import "server-only";
import { z } from "zod";

/** Addresses are kept trimmed and in lower case, so that the same mailbox typed twice is one account. */
export const email = z
  .string({ error: "Enter an e-mail address." })
  .trim()
  .toLowerCase()
  .max(254, "An e-mail address has at most 254 characters.")
  .pipe(z.email("Enter an e-mail address such as name@example.com."));

export const personName = z
  .string({ error: "Enter your name." })
  .trim()
  .min(1, "Enter your name.")
  .max(120, "Use at most 120 characters.");

export const teamName = z
  .string({ error: "Enter the team's name." })
  .trim()
  .min(1, "Enter the team's name.")
  .max(120, "Use at most 120 characters.");

/** Length is what counts (NIST SP 800-63B): no rules about kinds of characters. */
export const newPassword = z
  .string({ error: "Choose a password." })
  .min(10, "That is too short: use at least 10 characters.")
  .max(200, "Use at most 200 characters.");

/** A password that already exists: only its size is looked at. */
export const anyPassword = z
  .string({ error: "Enter the password." })
  .min(1, "Enter the password.")
  .max(200, "That is longer than any password here.");

/** A secret from a mailed link; 43 characters as made by newToken. */
export const token = z.string().regex(/^[A-Za-z0-9_-]{43}$/, "This link is incomplete. Copy it whole from the mail.");

/** Where to go after signing in: a path of this site and nothing else. */
export const nextPath = z
  .string()
  .regex(/^\/(?![/\\])[^\s\\]*$/)
  .max(2000)
  .optional()
  .catch(undefined);
