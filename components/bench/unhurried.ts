import { startTransition } from "react";

/** Latest at which something that may be drawn in pieces is drawn at once. */
const LATEST_MS = 250;

/**
 * Has React draw in pieces, between whatever is more urgent. Every transition of a page waits with every other: one of the router
 * that waits for its server would hold this back for as long. So after a while it is drawn at once, if that is `wanted` by then.
 * `act` may run twice. Answers how to take the second time back.
 */
export function unhurried(act: () => void, wanted: () => boolean = () => true): () => void {
  startTransition(act);
  const timer = setTimeout(() => wanted() && act(), LATEST_MS);
  return () => clearTimeout(timer);
}
