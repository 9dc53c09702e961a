"use client";

import { Tabs as Parts } from "radix-ui";
import type { ReactNode } from "react";

export interface TabItem {
  readonly value: string;
  readonly text: ReactNode;
  readonly content: ReactNode;
}

export interface TabsProps {
  label: string;
  value: string;
  onValueChange: (value: string) => void;
  items: readonly TabItem[];
}

/** Words in a row; the one that is open is underlined. Arrow keys move between them. */
export function Tabs({ label, value, onValueChange, items }: TabsProps) {
  return (
    <Parts.Root value={value} onValueChange={onValueChange}>
      <Parts.List aria-label={label} className="screen-only flex flex-wrap gap-x-6 gap-y-1 font-serif text-[1.125rem]">
        {items.map((item) => (
          <Parts.Trigger key={item.value} value={item.value} className={wordClass}>
            {item.text}
          </Parts.Trigger>
        ))}
      </Parts.List>
      {items.map((item) => (
        <Parts.Content key={item.value} value={item.value} tabIndex={-1} className="focus-visible:outline-none">
          {item.content}
        </Parts.Content>
      ))}
    </Parts.Root>
  );
}

/** A word that can be on: underlined and in ink when it is. */
export const wordClass =
  "border-b border-transparent pb-0.5 text-quiet hover:text-ink " +
  "data-[state=active]:border-ink data-[state=active]:text-ink aria-pressed:border-ink aria-pressed:text-ink";
