"use client";

import { Field } from "@/components/ui/Field";
import { Select } from "@/components/ui/Select";
import { Cell, Table } from "@/components/ui/Table";
import { type Role, roles, roleWords } from "@/lib/case/roles";
import { invite, revokeInvitation } from "@/lib/server/team/actions";
import { ActionForm } from "./ActionForm";
import { Day } from "./Day";
import { roleOptions } from "./Members";

export interface InvitationRow {
  readonly id: string;
  readonly email: string;
  readonly role: Role;
  readonly expiresAt: Date;
}

/** Open invitations, and the form for a new one. */
export function Invitations({ rows }: { rows: readonly InvitationRow[] }) {
  const columns = [
    { key: "email", head: "E-mail" },
    { key: "role", head: "Role" },
    { key: "until", head: "Open until" },
    { key: "out", head: <span className="sr-only">Withdraw</span> },
  ];
  return (
    <div className="grid gap-8">
      {rows.length > 0 && (
        <Table caption="Open invitations" captioned columns={columns}>
          {rows.map((row) => (
            <tr key={row.id}>
              <Cell>{row.email}</Cell>
              <Cell>{row.role}</Cell>
              <Cell className="whitespace-nowrap">
                <Day at={row.expiresAt} />
              </Cell>
              <Cell className="text-right">
                <ActionForm
                  action={revokeInvitation}
                  submit="Withdraw"
                  submitLabel={`Withdraw the invitation of ${row.email}`}
                  look="word"
                  hidden={{ id: row.id }}
                  inline
                />
              </Cell>
            </tr>
          ))}
        </Table>
      )}
      <InviteForm />
    </div>
  );
}

function InviteForm() {
  return (
    <section className="max-w-md" aria-labelledby="invite">
      <h2 id="invite" className="mb-4 font-serif text-lg font-normal italic">
        Invite somebody
      </h2>
      <ActionForm action={invite} submit="Send the invitation" label="Invite somebody">
        {({ fields, values }) => (
          <>
            <Field
              label="E-mail"
              name="email"
              type="email"
              autoComplete="off"
              required
              defaultValue={values.email}
              error={fields.email}
            />
            <Select key={values.role} label="Role" name="role" defaultValue={values.role ?? "engineer"} options={roleOptions} />
            <dl className="grid grid-cols-[auto_1fr] gap-x-4 gap-y-1 font-sans text-small text-quiet">
              {roles.map((role) => (
                <div key={role} className="contents">
                  <dt className="text-ink">{role}</dt>
                  <dd>{roleWords[role]}</dd>
                </div>
              ))}
            </dl>
          </>
        )}
      </ActionForm>
    </section>
  );
}
