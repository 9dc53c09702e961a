// In: tests' wishes. Out: requests that fail on purpose, so that retrying and resuming can be proved.

import type { ServerResponse } from "node:http";
import type { StorageCode } from "./storage-error";

/** Which requests a fault meets; what is left out matches everything. */
export interface Fault {
  readonly method?: string;
  /** A piece of the key. */
  readonly key?: string;
  readonly part?: number;
  /** How many requests it meets before it is spent; once when left out. */
  readonly times?: number;
  /** Answer this refusal instead. */
  readonly refuse?: StorageCode;
  /** Cut the connection after that many bytes of the body, of the request or of the answer. */
  readonly cutAfter?: number;
  /** Wait that many milliseconds first. */
  readonly delay?: number;
}

/** One request as the server saw it, for tests that count them. */
export interface Seen {
  readonly method: string;
  readonly key: string;
  readonly part?: number;
  /** What it was answered; missing while there is no answer yet. */
  readonly status?: number;
}

/** The request without its answer. */
export type Asked = Omit<Seen, "status">;

export class Faults {
  private pending: { fault: Fault; left: number }[] = [];
  private readonly seen: { asked: Asked; response: ServerResponse }[] = [];

  add(fault: Fault): void {
    this.pending.push({ fault, left: fault.times ?? 1 });
  }

  clear(): void {
    this.pending = [];
    this.seen.length = 0;
  }

  /** The fault that meets this request, counted as used. */
  meet(request: Asked): Fault | undefined {
    const met = this.pending.find(
      ({ fault, left }) =>
        left > 0 &&
        (fault.method === undefined || fault.method === request.method) &&
        (fault.key === undefined || request.key.includes(fault.key)) &&
        (fault.part === undefined || fault.part === request.part),
    );
    if (met) met.left -= 1;
    return met?.fault;
  }

  record(asked: Asked, response: ServerResponse): void {
    this.seen.push({ asked, response });
    if (this.seen.length > 10_000) this.seen.shift();
  }

  requests(): readonly Seen[] {
    return this.seen.map(({ asked, response }) => ({ ...asked, status: response.headersSent ? response.statusCode : undefined }));
  }
}
