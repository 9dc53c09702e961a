import type { Slot, WhatIf } from "@/lib/forensics/intent";
import { count } from "@/lib/view/format";
import type { Race } from "@/lib/view/race";
import { releasedWords } from "@/lib/view/race-words";

// What the lanes of a bit race say: who, what it intended, where it let go.

/** A message somebody asks about, and what would have become of it. */
export interface Asked {
  readonly name: string;
  readonly answer: WhatIf;
}

export interface Lane {
  readonly key: string;
  readonly name: string;
  readonly role: string;
  readonly tone: "plain" | "contest";
  readonly weight: number;
  readonly intent: readonly Slot[];
  /** Last slot it drives; what follows is drawn as let go. */
  readonly until: number;
  readonly released: string | null;
  /** Slots whose bits are printed in the contest's colour. */
  readonly marked: readonly number[];
  /** What was seen on the wire, so that the ninth bits are answers. */
  readonly seen: boolean;
}

/** The lanes of a race from top to bottom. */
export function lanesOf(race: Race, asked: Asked | null): Lane[] {
  const decisions = race.leavers.map((leaver) => leaver.yielding.at);
  const kept: Lane = {
    key: "kept",
    name: race.keptName,
    role: "kept the bus",
    tone: "plain",
    weight: 1.4,
    intent: race.kept,
    until: Number.POSITIVE_INFINITY,
    released: null,
    marked: decisions,
    seen: false,
  };
  const leavers = race.leavers.map(
    (leaver, k): Lane => ({
      key: `leaver${k}`,
      name: leaver.name,
      role: `yielded at bit ${count(leaver.contest.bit_index)}`,
      tone: "contest",
      weight: 1.4,
      intent: leaver.yielding.intent,
      until: leaver.yielding.at,
      released: releasedWords(leaver, race),
      marked: [leaver.yielding.at],
      seen: false,
    }),
  );
  const retries = asked ? [] : race.leavers.flatMap(retryLane);
  return [kept, ...leavers, ...(asked ? [askedLane(asked)] : []), busLane(race, asked), ...retries];
}

/** The retry under the transaction that beat it, with the same beginning; nothing where none was found. */
function retryLane({ name, contest, yielding, retry }: Race["leavers"][number], k: number): Lane[] {
  if (retry === null || contest.retry === null) return [];
  return [
    {
      key: `retry${k}`,
      name: `${name}, again`,
      role: `its retry, transaction ${count(contest.retry)}`,
      tone: "plain",
      weight: 1.4,
      intent: retry,
      until: Number.POSITIVE_INFINITY,
      released: null,
      marked: [yielding.at],
      seen: true,
    },
  ];
}

function askedLane({ name, answer }: Asked): Lane {
  const { outcome, at } = answer.meeting;
  const ends = outcome === "yields" || outcome === "undefined" || outcome === "open";
  const words =
    outcome === "yields" ? "would have yielded here" : outcome === "undefined" ? "no rule says who goes on" : "not known";
  return {
    key: "asked",
    name,
    role: "if it had sent this",
    tone: "plain",
    weight: 1.4,
    intent: answer.intent,
    until: ends ? at : Number.POSITIVE_INFINITY,
    released: ends ? words : null,
    marked: [at],
    seen: false,
  };
}

function busLane(race: Race, asked: Asked | null): Lane {
  return {
    key: "bus",
    name: "wired AND",
    role: asked ? "what the bus would have shown" : "what the bus shows",
    tone: "plain",
    weight: 2.2,
    intent: asked ? asked.answer.bus : race.bus,
    until: Number.POSITIVE_INFINITY,
    released: null,
    marked: asked ? [asked.answer.meeting.at] : race.leavers.map((leaver) => leaver.yielding.at),
    seen: true,
  };
}
