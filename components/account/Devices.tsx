"use client";

import { Cell, Table } from "@/components/ui/Table";
import { endDevice, endOtherDevices } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";
import { agentWords } from "./agent";
import { Day } from "./Day";

export interface DeviceRow {
  readonly id: string;
  readonly agent: string;
  readonly since: Date;
  readonly current: boolean;
}

/** Browsers the person is signed in on. */
export function Devices({ rows }: { rows: readonly DeviceRow[] }) {
  const columns = [
    { key: "agent", head: "Browser" },
    { key: "since", head: "Since" },
    { key: "out", head: <span className="sr-only">Sign out</span> },
  ];
  return (
    <div className="grid gap-5">
      <Table caption="Signed in on" captioned columns={columns}>
        {rows.map((row) => (
          <tr key={row.id}>
            <Cell>{agentWords(row.agent)}</Cell>
            <Cell>
              <Day at={row.since} hour />
            </Cell>
            <Cell className="text-right">
              {row.current ? (
                "this browser"
              ) : (
                <ActionForm action={endDevice} submit="Sign out" look="word" hidden={{ id: row.id }} inline />
              )}
            </Cell>
          </tr>
        ))}
      </Table>
      {rows.length > 1 && <ActionForm action={endOtherDevices} submit="Sign out every other browser" look="line" />}
    </div>
  );
}
