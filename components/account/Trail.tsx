import { Cell, Table } from "@/components/ui/Table";
import { Day } from "./Day";

export interface TrailRow {
  readonly id: string;
  readonly at: Date;
  readonly actorName: string;
  readonly event: string;
  readonly detail: Readonly<Record<string, string | number | boolean | null>>;
}

/** The newest lines of the audit trail; `shown` is the most that are ever listed. */
export function Trail({ rows, shown }: { rows: readonly TrailRow[]; shown: number }) {
  const columns = [
    { key: "at", head: "When" },
    { key: "who", head: "Who" },
    { key: "what", head: "What" },
    { key: "detail", head: "Particulars" },
  ];
  return (
    <>
      <Table caption="Audit trail" columns={columns}>
        {rows.map((row) => (
          <tr key={row.id}>
            <Cell className="whitespace-nowrap">
              <Day at={row.at} hour />
            </Cell>
            <Cell>{row.actorName}</Cell>
            <Cell>{row.event.replace(".", " ").replaceAll("-", " ")}</Cell>
            <Cell>{particulars(row.detail)}</Cell>
          </tr>
        ))}
      </Table>
      {rows.length === shown && <p className="font-sans text-small text-quiet">The newest {shown} lines are shown.</p>}
    </>
  );
}

// The database keeps no order of its own; what a line is about comes first.
const order = ["name", "email", "role", "from", "to"];

function particulars(detail: TrailRow["detail"]): string {
  return Object.entries(detail)
    .sort(([one], [other]) => order.indexOf(one) - order.indexOf(other))
    .map(([name, value]) => `${name}: ${value}`)
    .join(", ");
}
