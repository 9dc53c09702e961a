"use client";

import { useCallback, useEffect, useState } from "react";
import { OPENING, readState, type ViewState, writeState } from "@/lib/view/state";

/** Names that belong to the view; whatever else stands in the query is left alone. */
const OWN = ["reading", "show", "address", "direction", "nack", "bytes", "transaction", "strip", "scale"];

function written(state: ViewState): string {
  const query = new URLSearchParams(window.location.search);
  for (const name of OWN) query.delete(name);
  for (const [name, value] of writeState(state)) query.set(name, value);
  const text = query.toString();
  return text === "" ? window.location.pathname : `${window.location.pathname}?${text}`;
}

/**
 * The state of the view, kept in the address bar: a reload or a copied address shows the same. `initial` is the query a share
 * was made at; the address wins where it says anything itself.
 */
export function usePlace(initial: string | undefined): [ViewState, (change: Partial<ViewState>) => void] {
  const [state, setState] = useState<ViewState>(OPENING);

  useEffect(() => {
    const here = new URLSearchParams(window.location.search);
    const given = OWN.some((name) => here.has(name)) ? here : new URLSearchParams(initial ?? "");
    setState(readState((name) => given.get(name)));
  }, [initial]);

  const change = useCallback((by: Partial<ViewState>) => setState((now) => ({ ...now, ...by })), []);

  useEffect(() => {
    if (state === OPENING) return;
    const timer = setTimeout(() => window.history.replaceState(window.history.state, "", written(state)), 150);
    return () => clearTimeout(timer);
  }, [state]);

  return [state, change];
}
