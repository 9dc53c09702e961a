import { useState } from "react";
import { Cell, Table } from "@/components/ui/Table";
import { duration, figure, rate } from "@/lib/diagnosis/format";
import type { Measurement, Summary } from "@/lib/diagnosis/report";
import { count } from "@/lib/view/format";
import { Levels } from "./Levels";
import { LimitDetail } from "./LimitDetail";
import { PullUps } from "./PullUps";
import { Range } from "./Range";
import { type Verdict, VerdictWords, verdictOf } from "./Verdict";

const COLUMNS = [
  { key: "parameter", head: "interval" },
  { key: "count", head: "measured", number: true },
  { key: "min", head: "least", number: true },
  { key: "p50", head: "median", number: true },
  { key: "max", head: "most", number: true },
  { key: "limit", head: "limit", number: true },
  { key: "range", head: <span className="sr-only">drawn</span>, screenOnly: true },
  { key: "verdict", head: "verdict" },
];

/** The same digits as the command line prints. */
function timeWords(value: number | null, row: Measurement): string {
  return value === null ? "–" : figure(value, [row.limit_min_s, row.limit_max_s]).replace(" ", "\u00a0");
}

function limitWords(row: Measurement): string {
  const parts: string[] = [];
  if (row.limit_min_s !== null) parts.push(`at least ${duration(row.limit_min_s)}`);
  if (row.limit_max_s !== null) parts.push(`at most ${duration(row.limit_max_s)}`);
  return parts.join(", ") || "none";
}

const RANK: Record<Verdict, number> = { fail: 0, "too-close": 1, pass: 2, "not-measurable": 3, "no-limit": 4, "not-seen": 5 };

type Occurrence = Measurement["smallest"];

/** A figure that leads to the place where it was measured. */
function Extreme({
  words,
  at,
  broken,
  onGo,
}: {
  words: string;
  at: Occurrence;
  broken: boolean;
  onGo: (transaction: number) => void;
}) {
  const transaction = at?.transaction ?? null;
  const tone = broken ? "font-semibold text-broken" : "";
  if (transaction === null) {
    return (
      <Cell number className={tone}>
        {words}
      </Cell>
    );
  }
  return (
    <Cell number className={tone}>
      <button
        type="button"
        onClick={() => onGo(transaction)}
        title={`in transaction ${transaction}`}
        className="border-b border-field hover:border-ink print:border-0"
      >
        {words}
      </button>
    </Cell>
  );
}

function nameOf(row: Measurement): string {
  return `${row.parameter}${row.traffic ?? ""}`;
}

export interface LimitsProps {
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** Every interval of the specification's tables against its limit; least and most lead to where they were measured. */
export function Limits({ summary, onGo }: LimitsProps) {
  const [open, setOpen] = useState<string | null>(null);
  const rows = [...summary.measurements].sort((a, b) => RANK[verdictOf(a)] - RANK[verdictOf(b)]);
  if (rows.length === 0) return <p className="py-4 font-serif text-body text-quiet">Nothing could be measured in this record.</p>;
  const both = rows.some((row) => row.traffic === "Hs");
  return (
    <>
      <Table caption={`Measured against ${summary.limits.profile}, ${summary.limits.source}`} captioned columns={COLUMNS}>
        {rows.map((row) => {
          const name = nameOf(row);
          const shown = open === name;
          return [
            <LimitRow
              key={name}
              row={row}
              traffic={both ? (row.traffic ?? null) : null}
              open={shown}
              onOpen={() => setOpen(shown ? null : name)}
              onGo={onGo}
            />,
            shown && (
              <tr key={`${name} in full`}>
                <td colSpan={COLUMNS.length}>
                  <LimitDetail row={row} summary={summary} onGo={onGo} />
                </td>
              </tr>
            ),
          ];
        })}
      </Table>
      <Clauses rows={rows} />
      <p className="mt-3 max-w-[80ch] font-sans text-small text-quiet">
        Frequencies are given as their period. A figure nearer to its limit than the sampling can tell is too close to call, never
        a pass or a failure; so is a pass that one threshold cannot prove.
      </p>
      <SlowSampling rows={rows} />
      {summary.levels && <Levels levels={summary.levels} controllers={summary.controllers} />}
      <PullUps summary={summary} />
    </>
  );
}

interface LimitRowProps {
  row: Measurement;
  traffic: string | null;
  open: boolean;
  onOpen: () => void;
  onGo: (transaction: number) => void;
}

function LimitRow({ row, traffic, open, onOpen, onGo }: LimitRowProps) {
  return (
    <tr className={open ? "border-transparent!" : ""}>
      <th scope="row" className="whitespace-nowrap py-1.5 pr-5 text-left font-normal">
        <button
          type="button"
          aria-expanded={open}
          onClick={onOpen}
          title="between which points, which limit, which uncertainty"
          className="tabular border-b border-field text-hex hover:border-ink print:border-0"
        >
          {row.parameter.startsWith("f") ? `1/${row.parameter}` : row.parameter}
        </button>
        {traffic && <span className="ml-2 text-small text-quiet">{traffic}</span>}
      </th>
      <Cell number>{count(row.count)}</Cell>
      <Extreme words={timeWords(row.min_s, row)} at={row.smallest} broken={row.below > 0} onGo={onGo} />
      <Cell number>{timeWords(row.p50_s, row)}</Cell>
      <Extreme words={timeWords(row.max_s, row)} at={row.largest} broken={row.above > 0} onGo={onGo} />
      <Cell number>{limitWords(row)}</Cell>
      <Cell className="screen-only align-middle">
        <Range row={row} />
      </Cell>
      <Cell className="whitespace-nowrap">
        <VerdictWords row={row} />
      </Cell>
    </tr>
  );
}

/** Limits for which the record was sampled too slowly, and the rate it would take. */
function SlowSampling({ rows }: { rows: readonly Measurement[] }) {
  const slow = rows.filter((row) => (row.needs_rate ?? 0) > 0);
  if (slow.length === 0) return null;
  const each = slow.map((row) => `${row.parameter} (${rate(row.needs_rate ?? 0, "S/s")} would do)`);
  return (
    <p className="mt-2 max-w-[80ch] font-serif text-body">
      At this sample rate a value near its limit cannot be judged for {each.join(", ")}.
    </p>
  );
}

/** On paper nothing can be opened: the document of each limit stands under the table. */
function Clauses({ rows }: { rows: readonly Measurement[] }) {
  const byClause = new Map<string, string[]>();
  for (const { clause, parameter } of rows) if (clause) byClause.set(clause, [...(byClause.get(clause) ?? []), parameter]);
  return (
    <p className="print-only mt-2 font-sans text-small text-quiet">
      {[...byClause].map(([clause, symbols]) => `${[...new Set(symbols)].join(", ")}: ${clause}.`).join(" ")}
    </p>
  );
}
