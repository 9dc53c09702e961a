"use client";

import { Field } from "@/components/ui/Field";
import { Cell, Table } from "@/components/ui/Table";
import type { Role } from "@/lib/case/roles";
import { addTeam, switchTeam } from "@/lib/server/team/actions";
import { ActionForm } from "./ActionForm";

export interface TeamRow {
  readonly id: string;
  readonly name: string;
  readonly role: Role;
  readonly current: boolean;
}

/** Teams the person belongs to, and the form that founds a further one. */
export function Teams({ rows }: { rows: readonly TeamRow[] }) {
  const columns = [
    { key: "name", head: "Team" },
    { key: "role", head: "Your role" },
    { key: "in", head: <span className="sr-only">Work in it</span> },
  ];
  return (
    <div className="grid gap-5">
      {rows.length > 0 && (
        <Table caption="Your teams" captioned columns={columns}>
          {rows.map((row) => (
            <tr key={row.id}>
              <Cell>{row.name}</Cell>
              <Cell>{row.role}</Cell>
              <Cell className="text-right">
                {row.current ? (
                  "working here"
                ) : (
                  <ActionForm
                    action={switchTeam}
                    submit="Work here"
                    submitLabel={`Work in ${row.name}`}
                    look="word"
                    hidden={{ id: row.id }}
                    inline
                  />
                )}
              </Cell>
            </tr>
          ))}
        </Table>
      )}
      <details open={rows.length === 0}>
        <summary className="font-sans text-label">Found another team</summary>
        <div className="mt-3 max-w-md">
          <ActionForm action={addTeam} submit="Found the team" look="line" label="Found another team">
            {({ fields, values }) => (
              <Field
                label="Team"
                name="name"
                required
                maxLength={120}
                autoComplete="off"
                defaultValue={values.name}
                error={fields.name}
              />
            )}
          </ActionForm>
        </div>
      </details>
    </div>
  );
}
