"use client";

import Link from "next/link";
import { usePathname, useRouter, useSearchParams } from "next/navigation";
import { useDeferredValue, useEffect, useState } from "react";
import useSWR from "swr";
import { ask, wordsOf } from "@/components/casework/api";
import { Button, buttonClass } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Notice } from "@/components/ui/Notice";
import { Select } from "@/components/ui/Select";
import { Cell, Table } from "@/components/ui/Table";
import { statuses, statusWords } from "@/lib/case/case";
import { CaseListSchema, type CaseRow, type CaseList as Cases } from "@/lib/case/wire";
import { count } from "@/lib/view/format";
import { Verdict } from "./Verdict";
import { When } from "./When";

export interface CaseListProps {
  /** The page the address asks for, read on the server. */
  initial: Cases;
  mayCreate: boolean;
}

const FILTERS = ["q", "status", "assignee", "verdict", "sort", "page"] as const;

const statusOptions = [{ value: "", text: "any status" }, ...statuses.map((value) => ({ value, text: statusWords[value] }))];
const assigneeOptions = [
  { value: "", text: "anybody" },
  { value: "me", text: "me" },
  { value: "nobody", text: "nobody yet" },
];
const verdictOptions = [
  { value: "", text: "any verdict" },
  { value: "fail", text: "failed" },
  { value: "undecided", text: "undecided" },
  { value: "pass", text: "within limits" },
  { value: "none", text: "not decoded yet" },
];
const sortOptions = [
  { value: "updated", text: "last changed" },
  { value: "number", text: "number" },
  { value: "title", text: "title" },
];

const columns = [
  { key: "number", head: "Case", number: true },
  { key: "title", head: "Title" },
  { key: "status", head: "Status" },
  { key: "assignee", head: "With" },
  { key: "transactions", head: "Transactions", number: true },
  { key: "contests", head: "Contests", number: true },
  { key: "faults", head: "Faults", number: true },
  { key: "verdict", head: "Verdict" },
  { key: "updated", head: "Changed" },
];

/** The team's cases with search and filters; what is chosen stands in the address bar. */
export function CaseList({ initial, mayCreate }: CaseListProps) {
  const router = useRouter();
  const path = usePathname();
  const params = useSearchParams();
  const query = new URLSearchParams(FILTERS.flatMap((name) => (params.get(name) ? [[name, params.get(name) ?? ""]] : [])));
  const [text, setText] = useState(query.get("q") ?? "");
  const typed = useDeferredValue(text);
  const { data, error, mutate } = useSWR(`/api/cases?${query}`, (path) => ask({ path, answer: CaseListSchema }), {
    fallbackData: initial,
    keepPreviousData: true,
  });

  const choose = (name: string, value: string) => {
    const next = new URLSearchParams(query);
    if (value === "") next.delete(name);
    else next.set(name, value);
    if (name !== "page") next.delete("page");
    router.replace(`${path}${next.size > 0 ? `?${next}` : ""}`, { scroll: false });
  };

  // biome-ignore lint/correctness/useExhaustiveDependencies: runs when the typing pauses, with what the address then holds
  useEffect(() => {
    if (typed.trim() === (query.get("q") ?? "")) return;
    const timer = setTimeout(() => choose("q", typed.trim()), 250);
    return () => clearTimeout(timer);
  }, [typed]);

  const list = data ?? initial;
  const filtered = [...query.keys()].some((name) => name !== "sort" && name !== "page");
  return (
    <>
      <div className="flex flex-wrap items-end gap-x-6 gap-y-3">
        <div className="min-w-56 flex-1">
          <Field
            label="Find by number, title, finding or file name"
            type="search"
            value={text}
            onChange={(event) => setText(event.target.value)}
          />
        </div>
        <Select
          label="Status"
          options={statusOptions}
          value={query.get("status") ?? ""}
          onChange={(e) => choose("status", e.target.value)}
        />
        <Select
          label="With"
          options={assigneeOptions}
          value={query.get("assignee") ?? ""}
          onChange={(e) => choose("assignee", e.target.value)}
        />
        <Select
          label="Verdict"
          options={verdictOptions}
          value={query.get("verdict") ?? ""}
          onChange={(e) => choose("verdict", e.target.value)}
        />
        <Select
          label="Order by"
          options={sortOptions}
          value={query.get("sort") ?? "updated"}
          onChange={(e) => choose("sort", e.target.value)}
        />
      </div>
      {error && (
        <div className="mt-6">
          <Notice
            kind="broken"
            title="The list could not be refreshed"
            actions={<Button onClick={() => mutate()}>Try again</Button>}
          >
            {wordsOf(error)}
          </Notice>
        </div>
      )}
      <p aria-live="polite" className="mt-6 font-sans text-label text-quiet">
        {count(list.total)} {list.total === 1 ? "case" : "cases"}
        {filtered && " that fit"}
      </p>
      {list.cases.length === 0 ? (
        <Empty filtered={filtered} mayCreate={mayCreate} onClear={() => router.replace(path, { scroll: false })} />
      ) : (
        <Table caption="Cases" columns={columns}>
          {list.cases.map((row) => (
            <CaseLine key={row.number} row={row} />
          ))}
        </Table>
      )}
      {list.pages > 1 && (
        <nav aria-label="Pages" className="mt-4 flex items-baseline gap-5 font-sans text-label">
          <Button look="word" disabled={list.page <= 1} onClick={() => choose("page", String(list.page - 1))}>
            Earlier page
          </Button>
          <span className="text-quiet">
            page {list.page} of {list.pages}
          </span>
          <Button look="word" disabled={list.page >= list.pages} onClick={() => choose("page", String(list.page + 1))}>
            Next page
          </Button>
        </nav>
      )}
    </>
  );
}

function CaseLine({ row }: { row: CaseRow }) {
  return (
    <tr className="hover:bg-ink/5">
      <Cell number>{row.number}</Cell>
      <Cell className="min-w-52 font-serif text-body">
        <Link href={`/cases/${row.number}`} className="no-underline hover:underline">
          {row.title}
        </Link>
        {row.shared && <span className="ml-2 font-sans text-small text-quiet">shared</span>}
      </Cell>
      <Cell className="whitespace-nowrap">{statusWords[row.status]}</Cell>
      <Cell className="whitespace-nowrap">{row.assignee?.name ?? <span className="text-quiet">nobody</span>}</Cell>
      <Cell number>{count(row.transactions)}</Cell>
      <Cell number className={row.contests > 0 ? "text-contest" : "text-quiet"}>
        {count(row.contests)}
      </Cell>
      <Cell number className={row.faults > 0 ? "" : "text-quiet"}>
        {count(row.faults)}
      </Cell>
      <Cell className="whitespace-nowrap">
        <Verdict verdict={row.verdict} />
      </Cell>
      <Cell className="whitespace-nowrap text-quiet">
        <When at={row.updated_at} />
      </Cell>
    </tr>
  );
}

function Empty({ filtered, mayCreate, onClear }: { filtered: boolean; mayCreate: boolean; onClear: () => void }) {
  if (filtered) {
    return (
      <Notice title="No case fits" actions={<Button onClick={onClear}>Show all cases</Button>}>
        Nothing in this team matches what is asked for above.
      </Notice>
    );
  }
  return (
    <Notice
      title="No cases yet"
      actions={
        mayCreate && (
          <Link href="/cases/new" className={buttonClass("solid")}>
            Open a capture
          </Link>
        )
      }
    >
      A case begins with a capture: the CSV or VCD export of SCL and SDA from whatever instrument recorded them.
    </Notice>
  );
}
