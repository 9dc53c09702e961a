import { Cell, Table } from "@/components/ui/Table";
import type { Limit, LimitTable } from "@/lib/limits/profile";
import { count } from "@/lib/view/format";

const columns = [
  { key: "symbol", head: "Parameter" },
  { key: "min", head: "Least", number: true },
  { key: "max", head: "Greatest", number: true },
  { key: "unit", head: "Unit" },
  { key: "source", head: "Source" },
  { key: "status", head: "Status" },
  { key: "note", head: "Note" },
];

/** How a value came to be known (REFERENCE of the published limits), in words. */
const STATUS_WORDS: Readonly<Record<string, string>> = {
  VERIFIED: "read in the source",
  MEMORY: "from memory, not read",
  COMPUTED: "reckoned from values read",
  TEAM: "the team's own",
};

export function statusWords(status: string): string {
  return STATUS_WORDS[status] ?? status.toLowerCase();
}

/** A limit with its digits grouped; a dash where there is none. */
export function boundWords(value: number | null): string {
  if (value === null) return "–";
  return Number.isInteger(value) ? count(value) : String(Number(value.toPrecision(6)));
}

/** "xVDD" of the published tables is a share of the supply. */
export function unitWords(unit: string): string {
  return unit === "xVDD" ? "× VDD" : unit;
}

/** Every limit of a profile with where it was read. */
export function LimitRows({ caption, limits }: { caption: string; limits: LimitTable }) {
  return (
    <Table caption={caption} captioned columns={columns}>
      {Object.entries(limits).map(([symbol, limit]) => (
        <LimitRow key={symbol} symbol={symbol} limit={limit} />
      ))}
    </Table>
  );
}

function LimitRow({ symbol, limit }: { symbol: string; limit: Limit }) {
  return (
    <tr className="align-top">
      <Cell className="tabular whitespace-nowrap text-hex">{symbol}</Cell>
      <Cell number>{boundWords(limit.min)}</Cell>
      <Cell number>{boundWords(limit.max)}</Cell>
      <Cell className="whitespace-nowrap text-quiet">{unitWords(limit.unit)}</Cell>
      <Cell className="min-w-44">{limit.source}</Cell>
      <Cell className={limit.status === "MEMORY" ? "text-broken" : "text-quiet"}>{statusWords(limit.status)}</Cell>
      <Cell className="min-w-64 font-serif text-body">{limit.note}</Cell>
    </tr>
  );
}
