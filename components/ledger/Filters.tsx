"use client";

import { wordClass } from "@/components/ui/Tabs";
import { type LedgerFilter, SHOW_WORDS, SHOWS, type Show } from "@/lib/view/filter";
import { count } from "@/lib/view/format";

export interface FiltersProps {
  filter: LedgerFilter;
  onFilter: (filter: LedgerFilter) => void;
  counts: Record<Show, number>;
  /** False where nobody can tag. */
  tagging: boolean;
}

/** Words that narrow the ledger; the one in force is underlined. */
export function Filters({ filter, onFilter, counts, tagging }: FiltersProps) {
  const shown = SHOWS.filter(
    (show) => show === "all" || show === filter.show || (counts[show] > 0 && (show !== "tagged" || tagging)),
  );
  return (
    <fieldset className="flex flex-wrap gap-x-5 gap-y-1 border-0 p-0 font-sans text-label">
      <legend className="sr-only">Show transactions</legend>
      {shown.map((show) => (
        <button
          key={show}
          type="button"
          aria-pressed={filter.show === show}
          onClick={() => onFilter({ ...filter, show })}
          className={wordClass}
        >
          {SHOW_WORDS[show]}
          {show !== "all" && <span className="tabular ml-1.5 text-[0.75rem]">{count(counts[show])}</span>}
        </button>
      ))}
    </fieldset>
  );
}
