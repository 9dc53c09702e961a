import "server-only";
import type { z } from "zod";

/** The one table of what a door may answer instead of doing what was asked: code, HTTP status, words for people. */
const table = {
  "input-invalid": { status: 400, words: "Some of what was sent cannot be used. See the marked fields." },
  "origin-refused": {
    status: 403,
    words: "This request did not come from this site, so nothing was changed. Reload the page and try again.",
  },
  "signed-out": { status: 401, words: "Sign in first; this session has ended." },
  "wrong-credentials": { status: 401, words: "This e-mail address and password do not belong together." },
  "wrong-password": { status: 403, words: "That is not the current password." },
  "wrong-passphrase": { status: 403, words: "This is not the passphrase of this link." },
  "share-locked": { status: 403, words: "This link asks for a passphrase first." },
  forbidden: { status: 403, words: "Your role in this team does not include this. A team lead can change roles." },
  "not-found": { status: 404, words: "There is nothing at this address, or it is not yours to see." },
  "email-taken": { status: 409, words: "There is already an account for this e-mail address. Sign in, or reset its password." },
  "already-member": { status: 409, words: "This person is already a member of the team." },
  "last-lead": { status: 409, words: "A team keeps at least one lead. Make somebody else a lead first." },
  stale: { status: 409, words: "Somebody else changed this in the meantime. Their version is kept; look at it and save again." },
  conflict: { status: 409, words: "This does not fit what is stored now. Reload and try again." },
  "invitation-unusable": { status: 410, words: "This invitation was used, withdrawn or has expired. Ask for a new one." },
  "reset-unusable": { status: 410, words: "This link was used or has expired. Ask for a new one." },
  "too-large": { status: 413, words: "This is more than can be accepted in one request." },
  "type-refused": { status: 415, words: "This kind of content is not accepted here." },
  "too-many": { status: 429, words: "Too many tries. Wait a while and try again." },
  internal: {
    status: 500,
    words: "Something broke on our side. Nothing was saved; try again, and quote the request number if it happens again.",
  },
  "mail-failed": { status: 503, words: "The mail could not be sent, so nothing was changed. Try again later." },
  "upload-mismatch": {
    status: 422,
    words: "What arrived in storage is not the file that was announced, so it was not accepted. Upload it again.",
  },
  unreadable: { status: 422, words: "This capture cannot be read. Look at its channels and settings." },
  "upload-ended": { status: 410, words: "This upload was cancelled, refused or left alone for too long. Start it again." },
  "upload-busy": { status: 409, words: "This upload is being checked. Ask again in a moment." },
  "storage-failed": { status: 503, words: "The file storage did not answer. Nothing was lost; try again." },
} as const;

export type Code = keyof typeof table;

/** Messages beside the fields they are about; the key is the field's name, dotted where nested. */
export type FieldMessages = Readonly<Record<string, string>>;

interface Particulars {
  /** For the log only. */
  readonly detail?: string;
  /** Replaces the table's words where the place knows better. */
  readonly words?: string;
  readonly fields?: FieldMessages;
  /** Seconds to wait, for "too-many". */
  readonly retryAfter?: number;
  /** For "stale": what stands there now, as a read would answer it, so that neither version is lost. */
  readonly theirs?: unknown;
}

/** Thrown by anything behind a door to answer with a row of the table; everything else thrown is our own fault. */
export class Refusal extends Error {
  override readonly name = "Refusal";
  readonly status: number;
  readonly words: string;

  constructor(
    readonly code: Code,
    readonly particulars: Particulars = {},
  ) {
    super(particulars.detail ? `${code}: ${particulars.detail}` : code);
    this.status = table[code].status;
    this.words = particulars.words ?? table[code].words;
  }
}

/** What a door says, whichever way it says it. */
export interface Told {
  readonly code: Code;
  readonly status: number;
  readonly message: string;
  readonly fields: FieldMessages;
  readonly requestId: string;
  readonly retryAfter: number | null;
  readonly theirs?: unknown;
}

/** Any thrown value as an answer. What was not a refusal is logged with its request number and kept to ourselves. */
export function tell(error: unknown, requestId: string): Told {
  const refusal = error instanceof Refusal ? error : new Refusal("internal");
  if (error !== refusal) console.error(`request ${requestId} failed`, error);
  return {
    code: refusal.code,
    status: refusal.status,
    message: refusal.words,
    fields: refusal.particulars.fields ?? {},
    requestId,
    retryAfter: refusal.particulars.retryAfter ?? null,
    theirs: refusal.particulars.theirs,
  };
}

/** RFC 9457 problem details, never cached. */
export function problemResponse(told: Told): Response {
  const headers = new Headers({
    "content-type": "application/problem+json; charset=utf-8",
    "cache-control": "no-store",
    "x-request-id": told.requestId,
    "x-content-type-options": "nosniff",
  });
  if (told.retryAfter !== null) headers.set("retry-after", String(told.retryAfter));
  const body = {
    type: "about:blank",
    title: told.message,
    status: told.status,
    code: told.code,
    requestId: told.requestId,
    ...(Object.keys(told.fields).length > 0 ? { fields: told.fields } : {}),
    ...(told.theirs === undefined ? {} : { theirs: told.theirs }),
  };
  return new Response(JSON.stringify(body), { status: told.status, headers });
}

/** First message of each wrong field. */
export function inputRefusal(error: z.ZodError): Refusal {
  const fields: Record<string, string> = {};
  for (const issue of error.issues) {
    const name = issue.path.join(".");
    fields[name] ??= issue.message;
  }
  return new Refusal("input-invalid", { fields, detail: Object.keys(fields).join(", ") });
}
