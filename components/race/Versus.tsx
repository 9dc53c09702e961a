"use client";

import { useMemo, useState } from "react";
import { TextField } from "@/components/ui/Field";
import { Cell, Table } from "@/components/ui/Table";
import type { RosterEntry } from "@/lib/forensics/contract";
import { type Contender, type Meeting, meet, UNDEFINED_PAIRS } from "@/lib/forensics/intent";
import { readTyped } from "@/lib/forensics/typed-message";
import { address } from "@/lib/view/format";
import { bitWords } from "@/lib/view/race-words";
import { addressWidth } from "@/lib/view/roster-row";

/** Messages compared with each other at most: more make no table that anybody reads. */
const MOST = 16;

interface Listed {
  readonly contenders: readonly Contender[];
  readonly troubles: readonly string[];
}

/** A line is "name: message", or the message alone. */
export function contendersOf(text: string): Listed {
  const contenders: Contender[] = [];
  const troubles: string[] = [];
  const lines = text.split("\n");
  for (const [k, line] of lines.entries()) {
    if (line.trim() === "") continue;
    const colon = line.lastIndexOf(":");
    const message = line.slice(colon + 1);
    const read = readTyped(message);
    if (!read.ok) troubles.push(`Line ${k + 1}: ${read.problem.message}`);
    else if (contenders.length >= MOST) troubles.push(`Line ${k + 1}: at most ${MOST} messages are compared.`);
    else contenders.push({ name: colon > 0 ? line.slice(0, colon).trim() : message.trim(), intent: read.value.intent });
  }
  return { contenders, troubles };
}

/** First messages of a roster's targets, of which nothing is known but the address. */
export function messagesOf(entries: readonly RosterEntry[]): string {
  return entries
    .filter((entry) => entry.role === "target" && entry.address !== null)
    .slice(0, MOST / 2)
    .flatMap(({ name, address: value }) => {
      const written = address(value ?? 0, addressWidth(value ?? 0));
      return [`${name}, write: ${written} W ...`, `${name}, read: ${written} R`];
    })
    .join("\n");
}

function cellWords(meeting: Meeting, contender: Contender): string {
  const where = bitWords(contender.intent, meeting.at);
  switch (meeting.outcome) {
    case "keeps":
      return `keeps, ${where}`;
    case "yields":
      return `yields, ${where}`;
    case "tie":
      return "tie to the end";
    case "open":
      return `open after ${where}`;
    case "undefined":
      return `undefined, ${where}: ${UNDEFINED_PAIRS[meeting.pair]}`;
  }
}

/** If two controllers began at once: whose message keeps the bus, and the first bit that decides it. */
export function Versus({ entries }: { entries: readonly RosterEntry[] }) {
  const [text, setText] = useState<string | null>(null);
  const proposed = messagesOf(entries);
  const shown = text ?? proposed;
  const { contenders, troubles } = useMemo(() => contendersOf(shown), [shown]);
  return (
    <section aria-labelledby="versus" className="mt-12">
      <h2 id="versus" className="border-b border-ink font-serif text-lg italic">
        If two controllers began at once
      </h2>
      <p className="mt-2 max-w-[68ch] font-serif text-body">
        Bit by bit, whoever sends 0 where another sends 1 keeps the bus (UM10204 3.1.8): the lower address first, a write before a
        read. One message a line, as <code>name: 0x50 W 01 3C</code>, <code>0x48 R 2</code> or bytes <code>A0 01 3C</code>;{" "}
        <code>...</code> where more follows.
      </p>
      <div className="screen-only mt-3 max-w-2xl">
        <TextField
          label="Messages"
          rows={Math.min(12, Math.max(4, shown.split("\n").length))}
          value={shown}
          spellCheck={false}
          onChange={(event) => setText(event.target.value)}
          error={troubles.length > 0 ? troubles.join(" ") : undefined}
          className="!font-mono !text-hex"
        />
      </div>
      {contenders.length > 1 && (
        <div className="mt-4">
          <Table
            caption="Whose message keeps the bus from which"
            columns={[
              { key: "row", head: "this one" },
              ...contenders.map((contender, k) => ({ key: `against${k}`, head: `against ${contender.name}` })),
            ]}
          >
            {contenders.map((mine, row) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: two lines may say the same
              <tr key={row}>
                <Cell className="min-w-40 font-serif text-body">{mine.name}</Cell>
                {contenders.map((other, column) => {
                  if (column === row) {
                    return (
                      // biome-ignore lint/suspicious/noArrayIndexKey: as above
                      <Cell key={column} className="text-quiet">
                        –
                      </Cell>
                    );
                  }
                  const meeting = meet(mine.intent, other.intent);
                  return (
                    // biome-ignore lint/suspicious/noArrayIndexKey: as above
                    <Cell key={column} className={`min-w-24 ${TONES[meeting.outcome]}`}>
                      {cellWords(meeting, mine)}
                    </Cell>
                  );
                })}
              </tr>
            ))}
          </Table>
        </div>
      )}
    </section>
  );
}

const TONES: Record<Meeting["outcome"], string> = {
  keeps: "font-semibold",
  yields: "text-quiet",
  tie: "",
  open: "text-quiet italic",
  undefined: "text-broken",
};
