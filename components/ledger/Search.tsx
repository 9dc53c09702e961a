"use client";

import { type RefObject, useEffect, useState } from "react";
import { Button } from "@/components/ui/Button";
import { bytePattern, EVERYTHING, type LedgerFilter, passesAll } from "@/lib/view/filter";
import { address, addressBytes, count } from "@/lib/view/format";

export interface SearchProps {
  filter: LedgerFilter;
  onFilter: (filter: LedgerFilter) => void;
  addresses: readonly { readonly address: number; readonly bits: number; readonly count: number }[];
  names: ReadonlyMap<number, string>;
  /** The byte search, so that a key can reach it. */
  input: RefObject<HTMLInputElement | null>;
  /** Transactions that remain, null while all do. */
  remaining: number | null;
}

const entry =
  "border-0 border-b border-field bg-transparent py-0.5 text-label text-ink placeholder:text-quiet hover:border-ink aria-[invalid=true]:border-broken";

/** Address, direction, acknowledge and bytes: the second line of the ledger's filters. */
export function Search({ filter, onFilter, addresses, names, input, remaining }: SearchProps) {
  const [bytes, setBytes] = useState(filter.bytes);
  useEffect(() => setBytes(filter.bytes), [filter.bytes]);
  const wrong = bytes.trim() !== "" && bytePattern(bytes) === null;

  function searchBytes(text: string) {
    setBytes(text);
    if (text.trim() === "" || bytePattern(text) !== null) onFilter({ ...filter, bytes: text });
  }

  return (
    <search className="flex flex-wrap items-baseline gap-x-5 gap-y-2 font-sans text-label text-quiet">
      <label className="inline-flex items-baseline gap-2">
        address
        <select
          value={filter.address ?? ""}
          onChange={(event) => onFilter({ ...filter, address: event.target.value === "" ? null : Number(event.target.value) })}
          className={`${entry} [&>option]:bg-paper`}
        >
          <option value="">any</option>
          {addresses.map((seen) => (
            <option key={seen.address} value={seen.address}>
              {address(seen.address, seen.bits)}{" "}
              {addressBytes(seen.address, seen.bits) && `(${addressBytes(seen.address, seen.bits)})`}{" "}
              {names.get(seen.address) ?? ""} · {count(seen.count)}
            </option>
          ))}
        </select>
      </label>
      <label className="inline-flex items-baseline gap-2">
        direction
        <select
          value={filter.direction ?? ""}
          onChange={(event) =>
            onFilter({
              ...filter,
              direction: event.target.value === "R" || event.target.value === "W" ? event.target.value : null,
            })
          }
          className={`${entry} [&>option]:bg-paper`}
        >
          <option value="">both</option>
          <option value="R">read</option>
          <option value="W">write</option>
        </select>
      </label>
      <label className="inline-flex items-baseline gap-1.5">
        <input
          type="checkbox"
          checked={filter.nack}
          onChange={(event) => onFilter({ ...filter, nack: event.target.checked })}
          className="size-3 translate-y-px accent-[rgb(var(--accent))]"
        />
        with NACK
      </label>
      <label className="inline-flex items-baseline gap-2">
        bytes
        <input
          ref={input}
          type="search"
          value={bytes}
          onChange={(event) => searchBytes(event.target.value)}
          onKeyDown={(event) => {
            if (event.key === "Escape" || event.key === "Enter") event.currentTarget.blur();
          }}
          placeholder="01 1F"
          aria-invalid={wrong || undefined}
          aria-describedby="byte-search-help"
          spellCheck={false}
          autoComplete="off"
          className={`${entry} tabular w-32`}
        />
      </label>
      <span id="byte-search-help" className={wrong ? "text-broken" : "sr-only"}>
        two hexadecimal digits a byte, .. for any byte
      </span>
      {!passesAll(filter) && (
        <>
          <span aria-live="polite">{remaining === null ? "" : `${count(remaining)} shown`}</span>
          <Button look="word" onClick={() => onFilter(EVERYTHING)}>
            show all
          </Button>
        </>
      )}
    </search>
  );
}
