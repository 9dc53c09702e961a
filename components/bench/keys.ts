"use client";

import { useEffect, useRef } from "react";

/** What a key may do on the bench. Absent ones do nothing. */
export interface KeyActions {
  readonly next: () => void;
  readonly previous: () => void;
  readonly first: () => void;
  readonly last: () => void;
  readonly fault: (step: 1 | -1) => void;
  readonly contest: (step: 1 | -1) => void;
  readonly open: () => void;
  readonly reading: () => void;
  readonly tag: (() => void) | null;
  readonly note: (() => void) | null;
  readonly search: () => void;
  readonly help: () => void;
  readonly leave: () => void;
  /** Any other key: true when it was a tag's own key. */
  readonly other: (key: string) => boolean;
}

/** The keys and what they do, for the help and nothing else. */
export const KEY_WORDS: readonly (readonly [string, string])[] = [
  ["j k", "next and previous transaction; the arrow keys do the same in the stack"],
  ["n p", "next and previous fault"],
  ["] [", "next and previous contest"],
  ["Enter", "look at the selected transaction in the strip"],
  ["s", "change between stack and strip"],
  ["t", "choose a tag; a tag's own key puts it and moves on"],
  ["c", "write a note"],
  ["/", "search for bytes"],
  ["Esc", "leave the selection"],
  ["+ − 0", "in the strip: nearer, farther, whole recording; in the stack: the scale"],
  ["?", "this list"],
];

function writing(target: EventTarget | null): boolean {
  return target instanceof HTMLElement && (target.isContentEditable || /^(INPUT|TEXTAREA|SELECT)$/.test(target.tagName));
}

/** Arrow keys, Home, End and Enter belong to the stack unless the focus is on something that has its own use for them. */
function free(target: EventTarget | null): boolean {
  return !(target instanceof HTMLElement && target.closest("button, a, summary, [role=slider], [role=application], [role=tab]"));
}

function actionOf(event: KeyboardEvent, actions: KeyActions): (() => void) | null {
  switch (event.key) {
    case "j":
      return actions.next;
    case "k":
      return actions.previous;
    case "ArrowDown":
      return free(event.target) ? actions.next : null;
    case "ArrowUp":
      return free(event.target) ? actions.previous : null;
    case "Home":
      return free(event.target) ? actions.first : null;
    case "End":
      return free(event.target) ? actions.last : null;
    case "n":
      return () => actions.fault(1);
    case "p":
      return () => actions.fault(-1);
    case "]":
      return () => actions.contest(1);
    case "[":
      return () => actions.contest(-1);
    case "Enter":
      return free(event.target) ? actions.open : null;
    case "s":
      return actions.reading;
    case "t":
      return actions.tag;
    case "c":
      return actions.note;
    case "/":
      return actions.search;
    case "?":
      return actions.help;
    case "Escape":
      return actions.leave;
    default:
      return null;
  }
}

/** Listens on the whole page, except while somebody writes or a dialog is open. */
export function useKeys(actions: KeyActions): void {
  const live = useRef(actions);
  live.current = actions;
  useEffect(() => {
    const onKey = (event: KeyboardEvent) => {
      if (event.defaultPrevented || event.ctrlKey || event.metaKey || event.altKey) return;
      if (writing(event.target) || document.querySelector("[role=dialog]")) return;
      const action = actionOf(event, live.current);
      if (action) {
        event.preventDefault();
        action();
      } else if (event.key.length === 1 && live.current.other(event.key)) event.preventDefault();
    };
    window.addEventListener("keydown", onKey);
    return () => window.removeEventListener("keydown", onKey);
  }, []);
}
