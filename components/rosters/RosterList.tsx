"use client";

import Link from "next/link";
import { useState } from "react";
import useSWR from "swr";
import { When } from "@/components/cases/When";
import { ask, wordsOf } from "@/components/casework/api";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { Cell, Table } from "@/components/ui/Table";
import { RosterListSchema, type RosterView } from "@/lib/case/catalogue";
import { address, addressBytes, count } from "@/lib/view/format";
import { addressWidth, rosterFits } from "@/lib/view/roster-row";
import { NewRoster } from "./NewRoster";

const columns = [
  { key: "name", head: "Roster" },
  { key: "devices", head: "Devices", number: true },
  { key: "version", head: "Version", number: true },
  { key: "changed", head: "Changed" },
  { key: "csv", head: "" },
];

const found = [
  { key: "address", head: "Address" },
  { key: "bytes", head: "Bytes" },
  { key: "name", head: "Device" },
  { key: "roster", head: "Roster" },
];

/** Most devices listed for one search. */
const LISTED = 60;

/** The team's rosters, and their devices found by name or by address in either notation. */
export function RosterList({ initial, mayEdit }: { initial: readonly RosterView[]; mayEdit: boolean }) {
  const { data, error, mutate } = useSWR("/api/rosters", (path) => ask({ path, answer: RosterListSchema }), {
    fallbackData: { rosters: [...initial] },
  });
  const [search, setSearch] = useState("");
  const rosters = data?.rosters ?? initial;
  return (
    <>
      <div className="max-w-md">
        <Field
          label="Find a device by name, register or address"
          type="search"
          value={search}
          placeholder="0x50, A0 or a name"
          onChange={(event) => setSearch(event.target.value)}
        />
      </div>
      {error && (
        <div className="mt-5">
          <Notice
            kind="broken"
            title="The list could not be refreshed"
            actions={<Button onClick={() => mutate()}>Try again</Button>}
          >
            {wordsOf(error)}
          </Notice>
        </div>
      )}
      {search.trim() !== "" && <Found rosters={rosters} search={search} />}
      <div className="mt-8">
        {rosters.length === 0 ? (
          <Notice title="No rosters yet">
            A roster names the devices on a bus: address, name, registers, and what they allow themselves. Traces, reports and
            briefs then speak of the feed log instead of 0x50.
          </Notice>
        ) : (
          <Table caption="Rosters" columns={columns}>
            {rosters.map((roster) => (
              <tr key={roster.id} className="hover:bg-ink/5">
                <Cell className="min-w-52 font-serif text-body">
                  <Link href={`/rosters/${roster.id}`} className="no-underline hover:underline">
                    {roster.name}
                  </Link>
                </Cell>
                <Cell number>{count(roster.entries.length)}</Cell>
                <Cell number>{roster.version}</Cell>
                <Cell className="whitespace-nowrap text-quiet">
                  <When at={roster.updated_at} />
                </Cell>
                <Cell className="whitespace-nowrap text-right">
                  <a href={`/api/rosters/${roster.id}/csv`}>
                    CSV<span className="sr-only"> of {roster.name}</span>
                  </a>
                </Cell>
              </tr>
            ))}
          </Table>
        )}
      </div>
      {mayEdit && <NewRoster onMade={() => void mutate()} />}
    </>
  );
}

function Found({ rosters, search }: { rosters: readonly RosterView[]; search: string }) {
  const hits = rosters.flatMap((roster) =>
    roster.entries.filter((entry) => rosterFits(entry, search)).map((entry) => ({ roster, entry })),
  );
  return (
    <div className="mt-5">
      <p aria-live="polite" className="font-sans text-label text-quiet">
        {count(hits.length)} {hits.length === 1 ? "device fits" : "devices fit"}
        {hits.length > LISTED && `, the first ${LISTED} are shown`}
      </p>
      {hits.length > 0 && (
        <Table caption="Devices found" columns={found}>
          {hits.slice(0, LISTED).map(({ roster, entry }, place) => (
            // biome-ignore lint/suspicious/noArrayIndexKey: two devices of a roster may be equal in every field
            <tr key={`${roster.id} ${place}`}>
              <Cell className="tabular text-hex">
                {entry.address === null ? "–" : address(entry.address, addressWidth(entry.address))}
              </Cell>
              <Cell className="tabular text-hex text-quiet">
                {entry.address === null ? "" : addressBytes(entry.address, addressWidth(entry.address))}
              </Cell>
              <Cell className="font-serif text-body">
                {entry.name}
                {entry.role === "controller" && <span className="ml-2 font-sans text-small text-quiet">controller</span>}
              </Cell>
              <Cell>
                <Link href={`/rosters/${roster.id}`}>{roster.name}</Link>
              </Cell>
            </tr>
          ))}
        </Table>
      )}
    </div>
  );
}
