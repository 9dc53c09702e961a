"use client";

import { entryClass } from "@/components/ui/Field";
import { Cell, Table } from "@/components/ui/Table";
import { type Role, roles } from "@/lib/case/roles";
import { changeRole, leaveTeam, removeMember } from "@/lib/server/team/actions";
import { ActionForm } from "./ActionForm";
import { Day } from "./Day";

export interface MemberRow {
  readonly id: string;
  readonly name: string;
  readonly email: string;
  readonly role: Role;
  readonly joinedAt: Date;
  /** Whether this is the viewer. */
  readonly self: boolean;
}

export const roleOptions = roles.map((role) => ({ value: role, text: role }));

/** Members of the team; what may be changed follows the viewer's role, and is checked again by the server. */
export function Members({ rows, mayChange, mayRemove }: { rows: readonly MemberRow[]; mayChange: boolean; mayRemove: boolean }) {
  const columns = [
    { key: "name", head: "Name" },
    { key: "email", head: "E-mail" },
    { key: "role", head: "Role" },
    { key: "since", head: "Since" },
    { key: "out", head: <span className="sr-only">Remove</span> },
  ];
  return (
    <Table caption="Members" captioned columns={columns}>
      {rows.map((row) => (
        <tr key={row.id}>
          <Cell className="whitespace-nowrap">{row.self ? `${row.name} (you)` : row.name}</Cell>
          <Cell>{row.email}</Cell>
          <Cell>{mayChange ? <RoleChoice row={row} /> : row.role}</Cell>
          <Cell className="whitespace-nowrap">
            <Day at={row.joinedAt} />
          </Cell>
          <Cell className="text-right">{row.self ? <Leave /> : mayRemove && <Remove row={row} />}</Cell>
        </tr>
      ))}
    </Table>
  );
}

function RoleChoice({ row }: { row: MemberRow }) {
  return (
    <ActionForm
      action={changeRole}
      submit="Save"
      submitLabel={`Save role of ${row.name}`}
      look="word"
      hidden={{ id: row.id }}
      inline
    >
      {/* The key makes the list start anew from the stored role after every answer. */}
      {() => (
        <select
          key={row.role}
          name="role"
          defaultValue={row.role}
          aria-label={`Role of ${row.name}`}
          className={`${entryClass} !w-auto min-w-28 py-0.5 text-label [&>option]:bg-paper`}
        >
          {roles.map((role) => (
            <option key={role}>{role}</option>
          ))}
        </select>
      )}
    </ActionForm>
  );
}

function Remove({ row }: { row: MemberRow }) {
  return (
    <details className="ml-auto w-fit max-w-[34ch] open:min-w-52">
      <summary>Remove</summary>
      <p className="mt-2 mb-2 text-left font-serif text-body">
        {row.name} loses access to every case of the team. Notes, tags and findings stay.
      </p>
      <ActionForm
        action={removeMember}
        submit="Remove from the team"
        submitLabel={`Remove ${row.name} from the team`}
        look="danger"
        hidden={{ id: row.id }}
      />
    </details>
  );
}

function Leave() {
  return (
    <details className="ml-auto w-fit max-w-[34ch] open:min-w-52">
      <summary>Leave</summary>
      <p className="mt-2 mb-2 text-left font-serif text-body">
        You lose access to every case of the team until somebody invites you again.
      </p>
      <ActionForm action={leaveTeam} submit="Leave the team" look="danger" />
    </details>
  );
}
