"use client";

import { useId } from "react";
import { Button } from "@/components/ui/Button";
import { Cell, Table } from "@/components/ui/Table";
import { type RosterDraft, type RosterErrors, type RosterField, withField } from "@/lib/view/roster-row";

const FIELDS: readonly { readonly field: RosterField; readonly head: string; readonly width: string; readonly hint: string }[] = [
  { field: "name", head: "Name", width: "min-w-40", hint: "feed log" },
  { field: "address", head: "Address", width: "w-20", hint: "0x50" },
  { field: "bytes", head: "Bytes", width: "w-20", hint: "A0/A1" },
  { field: "registers", head: "Registers", width: "min-w-52", hint: "" },
  { field: "tlow", head: "SCL low", width: "w-20", hint: "5.2 µs" },
  { field: "thigh", head: "SCL high", width: "w-20", hint: "4.1 µs" },
  { field: "vol", head: "Low level", width: "w-20", hint: "0.2 V" },
  { field: "stretch", head: "May stretch", width: "w-20", hint: "25 ms" },
];

const columns = [
  { key: "role", head: "Role" },
  ...FIELDS.map(({ field, head }) => ({ key: field, head })),
  { key: "remove", head: "" },
];

export interface RosterTableProps {
  rows: readonly RosterDraft[];
  /** By the rows' keys; empty while nothing is wrong or shown. */
  errors: ReadonlyMap<string, RosterErrors>;
  /** Absent where the roster is only read. */
  onRow?: (row: RosterDraft) => void;
  onRemove?: (key: string) => void;
}

/** The devices as a table; either notation of an address can be typed, the other follows. */
export function RosterTable({ rows, errors, onRow, onRemove }: RosterTableProps) {
  return (
    <Table caption="Devices" columns={onRow ? columns : columns.slice(0, -1)}>
      {rows.map((row, place) => (
        <tr key={row.key} className="align-top">
          <Cell className="whitespace-nowrap">
            {onRow ? (
              <select
                aria-label={`Role of device ${place + 1}`}
                value={row.role}
                onChange={(event) => onRow({ ...row, role: event.target.value === "controller" ? "controller" : "target" })}
                className="border-0 border-b border-field bg-transparent py-1 text-label text-ink [&>option]:bg-paper"
              >
                <option value="target">target</option>
                <option value="controller">controller</option>
              </select>
            ) : (
              row.role
            )}
          </Cell>
          {FIELDS.map((column) => (
            <Cell key={column.field}>
              {onRow ? (
                <Entry
                  row={row}
                  place={place}
                  column={column}
                  error={errors.get(row.key)?.[column.field]}
                  onText={(text) => onRow(withField(row, column.field, text))}
                />
              ) : (
                <span className={FACES[column.field] ?? ""}>{row[column.field]}</span>
              )}
            </Cell>
          ))}
          {onRow && (
            <Cell className="text-right">
              <Button look="word" onClick={() => onRemove?.(row.key)}>
                Remove<span className="sr-only"> {row.name || `device ${place + 1}`}</span>
              </Button>
            </Cell>
          )}
        </tr>
      ))}
    </Table>
  );
}

const FIGURES = "tabular text-hex";
const FACES: Partial<Record<RosterField, string>> = {
  name: "font-serif text-body",
  registers: "whitespace-pre-wrap",
  address: FIGURES,
  bytes: FIGURES,
  tlow: FIGURES,
  thigh: FIGURES,
  vol: FIGURES,
  stretch: FIGURES,
};

interface EntryProps {
  row: RosterDraft;
  place: number;
  column: (typeof FIELDS)[number];
  error?: string;
  onText: (text: string) => void;
}

function Entry({ row, place, column, error, onText }: EntryProps) {
  const id = useId();
  const shared = {
    "aria-label": `${column.head} of ${row.name || `device ${place + 1}`}`,
    "aria-invalid": error ? true : undefined,
    "aria-describedby": error ? id : undefined,
    value: row[column.field],
    placeholder: column.hint,
    className: `${column.width} w-full border-0 border-b border-hairline bg-transparent py-1 text-ink placeholder:text-quiet hover:border-ink focus-visible:border-accent aria-[invalid=true]:border-broken ${FACES[column.field] ?? ""}`,
  };
  return (
    <>
      {column.field === "registers" ? (
        <textarea {...shared} rows={1} onChange={(event) => onText(event.target.value)} />
      ) : (
        <input {...shared} autoComplete="off" spellCheck={false} onChange={(event) => onText(event.target.value)} />
      )}
      {error && (
        <p id={id} className="max-w-40 text-small text-broken">
          × {error}
        </p>
      )}
    </>
  );
}
