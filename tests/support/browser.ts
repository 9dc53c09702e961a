import { AsyncLocalStorage } from "node:async_hooks";
import { vi } from "vitest";
import { type FormState, idle } from "@/lib/case/form";

// Server actions want the framework's request around them. Only that shell is replaced; everything behind it is real.

interface Visit {
  readonly headers: Headers;
  readonly jar: Map<string, string>;
  readonly later: (() => unknown)[];
}

const visits = new AsyncLocalStorage<Visit>();

function visit(): Visit {
  const current = visits.getStore();
  if (!current) throw new Error("not inside a browser's request");
  return current;
}

vi.mock("next/headers", () => ({
  headers: async () => visit().headers,
  cookies: async () => ({
    get: (name: string) => {
      const value = visit().jar.get(name);
      return value === undefined ? undefined : { name, value };
    },
    set: (name: string, value: string, attributes: { maxAge?: number }) => {
      if (attributes.maxAge === 0) visit().jar.delete(name);
      else visit().jar.set(name, value);
    },
  }),
}));
vi.mock("next/cache", () => ({ refresh: () => undefined, revalidatePath: () => undefined }));
vi.mock("next/server", () => ({ after: (work: () => unknown) => visit().later.push(work) }));
vi.mock("next/navigation", () => ({
  redirect: (to: string) => {
    throw new Redirected(to);
  },
  notFound: () => {
    throw new Error("not found");
  },
}));

class Redirected extends Error {
  constructor(readonly to: string) {
    super(`to ${to}`);
  }
}

export interface Answer {
  readonly state: FormState;
  /** Where the action sent the browser; null where it stayed. */
  readonly to: string | null;
}

type Action = (before: FormState, form: FormData) => Promise<FormState>;
type Handler = (request: Request, context: { params: Promise<Record<string, string>> }) => Promise<Response>;

/** One person's browser: keeps cookies, submits forms, calls route handlers. */
export class Browser {
  readonly jar = new Map<string, string>();

  constructor(
    private readonly address = "203.0.113.7",
    private readonly origin: string | null = "http://firstlow.test",
    private readonly agent = "Mozilla/5.0 (X11; Linux x86_64) Firefox/140.0",
  ) {}

  headers(more: Record<string, string> = {}): Headers {
    const headers = new Headers({ host: "firstlow.test", "user-agent": this.agent, "x-forwarded-for": this.address, ...more });
    if (this.origin !== null) headers.set("origin", this.origin);
    const cookie = [...this.jar].map(([name, value]) => `${name}=${value}`).join("; ");
    if (cookie) headers.set("cookie", cookie);
    return headers;
  }

  /** Submits a form and waits for what the action left for after its answer. */
  async submit(action: Action, fields: Record<string, string>): Promise<Answer> {
    const form = new FormData();
    for (const [name, value] of Object.entries(fields)) form.set(name, value);
    const here: Visit = { headers: this.headers(), jar: this.jar, later: [] };
    return visits.run(here, async () => {
      let answer: Answer;
      try {
        answer = { state: await action(idle, form), to: null };
      } catch (error) {
        if (!(error instanceof Redirected)) throw error;
        answer = { state: { ...idle, status: "done" }, to: error.to };
      }
      for (const work of here.later) await work();
      return answer;
    });
  }

  /** Calls a route handler as a fetch of this browser would. */
  call(handler: Handler, method = "GET", body?: unknown, params: Record<string, string> = {}, url = "http://firstlow.test/api") {
    const headers = this.headers(body === undefined ? {} : { "content-type": "application/json" });
    const request = new Request(url, { method, headers, body: body === undefined ? undefined : JSON.stringify(body) });
    return handler(request, { params: Promise.resolve(params) });
  }
}
