import type { ReactNode } from "react";

export interface Column {
  /** Left out on paper: a drawing that would make the table too wide. */
  readonly screenOnly?: boolean;
  readonly key: string;
  readonly head: ReactNode;
  /** Numbers stand to the right, in the monospaced face. */
  readonly number?: boolean;
}

export interface TableProps {
  caption: string;
  /** Whether the caption is also shown. */
  captioned?: boolean;
  columns: readonly Column[];
  children: ReactNode;
}

/** A typeset table: one strong rule under the head, hairlines between rows, no boxes. Wide ones scroll inside themselves. */
export function Table({ caption, captioned = false, columns, children }: TableProps) {
  return (
    <section aria-label={caption} className="relative max-w-full overflow-x-auto">
      <table className="w-full border-collapse font-sans text-label">
        <caption className={captioned ? "pb-1 text-left font-serif text-lg italic" : "sr-only"}>{caption}</caption>
        <thead>
          <tr className="border-b border-ink text-quiet">
            {columns.map((column) => (
              <th
                key={column.key}
                scope="col"
                className={`py-1 pr-5 align-bottom font-normal last:pr-0 ${column.number ? "text-right" : "text-left"} ${column.screenOnly ? "screen-only" : ""}`}
              >
                {column.head}
              </th>
            ))}
          </tr>
        </thead>
        <tbody className="[&>tr]:border-b [&>tr]:border-hairline">{children}</tbody>
      </table>
    </section>
  );
}

export function Cell({
  number = false,
  children,
  className = "",
}: {
  number?: boolean;
  children?: ReactNode;
  className?: string;
}) {
  return (
    <td
      className={`py-1.5 pr-5 align-baseline last:pr-0 ${number ? "tabular whitespace-nowrap text-right text-hex" : ""} ${className}`}
    >
      {children}
    </td>
  );
}
