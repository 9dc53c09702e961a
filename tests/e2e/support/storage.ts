// Faults of the storage, planned by a browser test: broken lines and refusals for uploads to survive.

import type { Fault, Seen } from "@/workers/stack/storage-fault";

async function control(method: string, path: string, body?: Fault): Promise<Seen[]> {
  const answer = await fetch(`${process.env.S3_ENDPOINT}/-/${path}`, {
    method,
    headers: { authorization: `Bearer ${process.env.S3_SECRET_KEY}` },
    body: body && JSON.stringify(body),
  });
  if (!answer.ok) throw new Error(`The storage's controls answered ${answer.status}.`);
  return (await answer.json()) as Seen[];
}

export async function planFault(fault: Fault): Promise<void> {
  await control("POST", "faults", fault);
}

/** Forgets planned faults and the requests seen so far. */
export async function calmStorage(): Promise<void> {
  await control("POST", "calm");
}

/** What the storage was asked since it was last calmed. */
export function storageRequests(): Promise<Seen[]> {
  return control("GET", "requests");
}
