// The browser's one way to the server: typed by the schemas of lib/case, errors as ApiProblem.

import type { z } from "zod";

/** What a door answered instead of doing what was asked (problem+json), or that no answer came. */
export class ApiProblem extends Error {
  override readonly name = "ApiProblem";
  constructor(
    /** Stable code of lib/server/http/problem.ts, or "offline". */
    readonly code: string,
    message: string,
    readonly status: number,
    readonly requestId: string | null,
    /** For "stale": what stands on the server now. */
    readonly theirs: unknown,
  ) {
    super(message);
  }
}

const OFFLINE = "The server did not answer. Nothing you wrote is lost; try again when the connection is back.";

export interface Ask<Answer extends z.ZodType> {
  readonly method?: "GET" | "POST" | "PATCH" | "PUT" | "DELETE";
  readonly path: string;
  readonly body?: unknown;
  /** Shape of the answer; left out for 204. */
  readonly answer?: Answer;
  readonly signal?: AbortSignal;
}

/** @throws ApiProblem */
export async function ask<Answer extends z.ZodType>({
  method = "GET",
  path,
  body,
  answer,
  signal,
}: Ask<Answer>): Promise<z.output<Answer>> {
  let response: Response;
  try {
    response = await fetch(path, {
      method,
      signal,
      ...(body === undefined ? {} : { body: JSON.stringify(body), headers: { "content-type": "application/json" } }),
    });
  } catch (error) {
    if (error instanceof DOMException && error.name === "AbortError") throw error;
    throw new ApiProblem("offline", OFFLINE, 0, null, undefined);
  }
  if (!response.ok) throw await problemOf(response);
  if (answer === undefined || response.status === 204) return undefined as z.output<Answer>;
  return answer.parse(await response.json());
}

async function problemOf(response: Response): Promise<ApiProblem> {
  const told: unknown = await response.json().catch(() => null);
  const body = typeof told === "object" && told !== null ? (told as Record<string, unknown>) : {};
  const fields = typeof body.fields === "object" && body.fields !== null ? Object.values(body.fields) : [];
  const title = typeof body.title === "string" ? body.title : `The server answered ${response.status}.`;
  return new ApiProblem(
    typeof body.code === "string" ? body.code : "internal",
    [title, ...fields.map(String)].join(" "),
    response.status,
    typeof body.requestId === "string" ? body.requestId : response.headers.get("x-request-id"),
    body.theirs,
  );
}

/** The sentence to show for anything caught. */
export function wordsOf(error: unknown): string {
  if (error instanceof ApiProblem)
    return error.requestId && error.status >= 500 ? `${error.message} Request ${error.requestId}.` : error.message;
  return error instanceof Error ? error.message : String(error);
}
