"use client";

import { useId } from "react";
import { entryClass } from "@/components/ui/Field";
import { type WhatIf, whatIf } from "@/lib/forensics/intent";
import { readTyped } from "@/lib/forensics/typed-message";
import type { Race } from "@/lib/view/race";
import { whatIfWords } from "@/lib/view/race-words";

export interface Asked {
  readonly answer: WhatIf | null;
  readonly words: string;
  readonly wrong: boolean;
}

/** What comes of a typed message against the one that kept the bus; empty text asks nothing. */
export function answerTo(race: Race, text: string): Asked {
  if (text.trim() === "") return { answer: null, words: "", wrong: false };
  const typed = readTyped(text);
  if (!typed.ok) return { answer: null, words: `${typed.problem.message} ${typed.problem.advice}`, wrong: true };
  const answer = whatIf(race.kept, race.bus, typed.value.intent);
  return { answer, words: whatIfWords(answer.meeting, answer.intent), wrong: false };
}

export interface AskProps {
  /** Who would have sent it. */
  name: string;
  text: string;
  onText: (text: string) => void;
  asked: Asked;
}

/** "what if the gateway had sent ...": one line, answered while it is typed. */
export function Ask({ name, text, onText, asked }: AskProps) {
  const id = useId();
  return (
    <div className="screen-only mt-4 flex flex-wrap items-baseline gap-x-4 gap-y-1 font-sans text-label">
      <label htmlFor={id} className="text-quiet">
        what if {name} had sent
      </label>
      <input
        id={id}
        value={text}
        onChange={(event) => onText(event.target.value)}
        placeholder="0x50 W 01 0C"
        maxLength={1200}
        autoComplete="off"
        spellCheck={false}
        aria-invalid={asked.wrong || undefined}
        aria-describedby={`${id}-answer`}
        className={`${entryClass} max-w-[22rem] !font-mono !text-hex`}
      />
      <p
        id={`${id}-answer`}
        aria-live="polite"
        className={`max-w-[60ch] basis-64 grow ${asked.wrong ? "text-broken" : "text-ink"}`}
      >
        {asked.wrong && "× "}
        {asked.words}
      </p>
    </div>
  );
}
