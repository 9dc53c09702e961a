"use client";

import { useState } from "react";
import type { BenchCase, Span } from "@/components/bench/annotations";
import { TagShape } from "@/components/ui/Icon";
import { count } from "@/lib/view/format";
import { MarginHead } from "./MarginHead";

export interface TagsPartProps {
  of: BenchCase;
  selected: number | null;
  /** With no transaction selected, tags stand on the stretch that is shown. */
  span: Span | null;
  onTag: (kind: string) => void;
}

function overlaps(a: Span | null, b: Span | null): boolean {
  return a !== null && b !== null && a.from <= b.to && b.from <= a.to;
}

/** Fault tags of the selected transaction, and the catalogue to choose from; each category may have a key. */
export function TagsPart({ of, selected, span, onTag }: TagsPartProps) {
  const [error, setError] = useState("");
  if ((selected === null && span === null) || (!of.addTag && of.tags.length === 0)) return null;
  const here = of.tags.filter((tag) => (selected === null ? overlaps(tag.span, span) : tag.transaction === selected));
  const offered = of.addTag ? of.tagKinds.filter((kind) => !kind.retired && !here.some((tag) => tag.kind === kind.id)) : [];
  if (here.length === 0 && offered.length === 0) return null;

  async function remove(id: string) {
    setError((await of.removeTag?.(id)) ?? "");
  }

  return (
    <section>
      <MarginHead>{selected === null ? "Tags on the span shown" : `Tags on ${count(selected)}`}</MarginHead>
      <ul className="mt-2 font-sans text-label">
        {here.map((tag) => (
          <li key={tag.id} className="flex items-baseline gap-2 py-0.5">
            <span className="text-accent">
              <TagShape />
            </span>
            {of.tagKinds.find((kind) => kind.id === tag.kind)?.name ?? "retired tag"}
            <span className="text-small text-quiet">{tag.author}</span>
            {tag.mine && of.removeTag && (
              <button
                type="button"
                onClick={() => remove(tag.id)}
                className="screen-only ml-auto border-b border-field text-small text-quiet hover:text-ink"
              >
                take off
              </button>
            )}
          </li>
        ))}
      </ul>
      <p aria-live="polite" className="font-sans text-small text-broken">
        {error}
      </p>
      {offered.length > 0 && (
        <ul id="tag-catalogue" className="screen-only mt-1 flex flex-wrap gap-x-4 gap-y-1 font-sans text-label text-quiet">
          {offered.map((kind) => (
            <li key={kind.id}>
              <button
                type="button"
                onClick={() => onTag(kind.id)}
                className="border-b border-field hover:border-ink hover:text-ink"
              >
                {kind.name}
                {kind.key && <kbd className="ml-1.5 text-quiet">{kind.key}</kbd>}
              </button>
            </li>
          ))}
        </ul>
      )}
    </section>
  );
}
