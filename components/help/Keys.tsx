"use client";

import { KEY_WORDS } from "@/components/bench/keys";

/** The keys of the bench; the list belongs to the code that listens to them. */
export function Keys() {
  return (
    <dl className="mt-2 grid max-w-[60rem] grid-cols-[5rem_1fr] gap-x-6 gap-y-1.5 font-serif text-body">
      {KEY_WORDS.map(([key, words]) => (
        <div key={key} className="contents">
          <dt>
            <kbd>{key}</kbd>
          </dt>
          <dd>{words}</dd>
        </div>
      ))}
    </dl>
  );
}
