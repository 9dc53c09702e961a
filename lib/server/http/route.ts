import "server-only";
import { z } from "zod";
import type { Viewer } from "@/lib/server/access/viewer";
import { lucia } from "@/lib/server/auth/lucia";
import { fork } from "@/lib/server/database";
import { type Caller, checkOrigin, readCaller } from "./caller";
import { type Admitted, admit, type Given, parse, type Rules } from "./entrance";
import { problemResponse, Refusal, tell } from "./problem";

type RawParams = Readonly<Record<string, string | string[] | undefined>>;

/** A JSON body beyond this is not a form any more; captures go straight to storage. */
const bodyLimit = 4 * 1024 * 1024;

interface RouteDefinition<Who extends keyof Admitted, Input extends z.ZodType, Params extends z.ZodType> extends Rules<Who> {
  /** Shape of the query (GET, HEAD) or of the JSON body; left out where the handler reads neither. */
  readonly input?: Input;
  readonly params?: Params;
  /** Bytes of JSON accepted, where 4 MiB are not enough. */
  readonly limit?: number;
  /** Another proof than the session: a share link or a station's key. */
  readonly settle?: (caller: Caller, params: z.output<Params>, request: Request) => Promise<Viewer>;
  /** Returns a Response, or a value that is sent as JSON. */
  readonly handle: (given: RouteGiven<Who, z.output<Input>, z.output<Params>>) => Promise<unknown>;
}

interface RouteGiven<Who extends keyof Admitted, Input, Params> extends Given<Who, Input> {
  readonly params: Params;
  readonly request: Request;
}

type Handler = (request: Request, context: { params: Promise<RawParams> }) => Promise<Response>;

/** Makes a route handler. Every verb exported below app/ is made here; a guard test refuses any other. */
export function route<
  Who extends keyof Admitted,
  Input extends z.ZodType = z.ZodUndefined,
  Params extends z.ZodType = z.ZodUnknown,
>(definition: RouteDefinition<Who, Input, Params>): Handler {
  return async (request, context) => {
    const caller = readCaller(request.headers);
    try {
      const response = asResponse(await enter(definition, request, await context.params, caller));
      response.headers.set("x-request-id", caller.requestId);
      response.headers.set("x-content-type-options", "nosniff");
      if (!response.headers.has("cache-control")) response.headers.set("cache-control", "no-store");
      return response;
    } catch (error) {
      const told = tell(error, caller.requestId);
      const response = problemResponse(told);
      // A cookie whose session has ended is taken off the browser, or it would be sent for ever.
      if (told.code === "signed-out" && lucia().readSessionCookie(caller.cookie)) {
        response.headers.append("set-cookie", lucia().createBlankSessionCookie().serialize());
      }
      return response;
    }
  };
}

async function enter<Who extends keyof Admitted, Input extends z.ZodType, Params extends z.ZodType>(
  definition: RouteDefinition<Who, Input, Params>,
  request: Request,
  rawParams: RawParams | undefined,
  caller: Caller,
): Promise<unknown> {
  const reading = request.method === "GET" || request.method === "HEAD";
  const { settle } = definition;
  // A page of another site cannot add this header without our leave, so a program that sends it needs no Origin.
  if (!reading && !request.headers.has("authorization")) checkOrigin(caller);
  const params = pathParams(definition.params, rawParams);
  const viewer = await admit(definition, caller, settle && (() => settle(caller, params, request)));
  const input = definition.input
    ? parse(definition.input, reading ? queryOf(request) : await jsonOf(request, definition.limit ?? bodyLimit))
    : undefined;
  return definition.handle({ viewer, input: input as z.output<Input>, params, request, caller, em: await fork() });
}

/** A malformed id in a path is a page that does not exist, not a mistake in a form. */
function pathParams<Params extends z.ZodType>(schema: Params | undefined, raw: RawParams | undefined): z.output<Params> {
  const checked = (schema ?? z.unknown()).safeParse(raw ?? {});
  if (!checked.success) throw new Refusal("not-found", { detail: "path parameters" });
  return checked.data as z.output<Params>;
}

function queryOf(request: Request): Record<string, string> {
  return Object.fromEntries(new URL(request.url).searchParams);
}

async function jsonOf(request: Request, limit: number): Promise<unknown> {
  if (!(request.headers.get("content-type") ?? "").startsWith("application/json")) throw new Refusal("type-refused");
  if (Number(request.headers.get("content-length") ?? 0) > limit) throw new Refusal("too-large");
  const text = await request.text();
  if (text.length > limit) throw new Refusal("too-large");
  try {
    return JSON.parse(text);
  } catch {
    throw new Refusal("input-invalid", { words: "The body is not valid JSON." });
  }
}

function asResponse(answer: unknown): Response {
  if (answer instanceof Response) return answer;
  if (answer === undefined) return new Response(null, { status: 204 });
  return Response.json(answer);
}

/** Sends the caller on to bytes in storage. The address is short-lived, so nobody may keep the answer. */
export function moved(address: string): Response {
  return new Response(null, {
    status: 307,
    headers: { location: address, "cache-control": "no-store", "x-robots-tag": "noindex" },
  });
}
