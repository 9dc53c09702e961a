// A team's limits as they are typed: empty means as in the base, a dash that there is no limit, a number in the base's unit.

import type { LimitChanges } from "@/lib/case/case";
import type { LimitTable } from "@/lib/limits/profile";

export interface LimitDraft {
  readonly min: string;
  readonly max: string;
  readonly source: string;
}

export const AS_BASE: LimitDraft = { min: "", max: "", source: "" };
export type ProfileDraft = Readonly<Record<string, LimitDraft>>;

function boundText(value: number | null | undefined): string {
  return value === undefined ? "" : value === null ? "-" : String(value);
}

export function profileDraft(changes: LimitChanges): ProfileDraft {
  return Object.fromEntries(
    Object.entries(changes).map(([symbol, { min, max, source }]) => [
      symbol,
      { min: boundText(min), max: boundText(max), source: source ?? "" },
    ]),
  );
}

/** null takes the limit away, undefined leaves it as in the base, NaN is no number. */
function boundOf(text: string): number | null | undefined {
  const word = text.trim().replace(",", ".");
  if (word === "") return undefined;
  if (/^(-|–|−|none)$/i.test(word)) return null;
  return /^(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(word) ? Number(word) : Number.NaN;
}

export interface ReadDraft {
  readonly changes: LimitChanges;
  /** By symbol, one sentence. */
  readonly errors: ReadonlyMap<string, string>;
}

/** What the draft changes of `base`; a value typed that equals the base's is no change. */
export function readDraft(draft: ProfileDraft, base: LimitTable): ReadDraft {
  const changes: Record<string, LimitChanges[string]> = {};
  const errors = new Map<string, string>();
  for (const [symbol, { min: least, max: most, source }] of Object.entries(draft)) {
    const from = base[symbol];
    if (from === undefined) continue;
    const [min, max] = [boundOf(least), boundOf(most)];
    if (Number.isNaN(min) || Number.isNaN(max)) {
      errors.set(symbol, "a number, or - for no limit");
      continue;
    }
    const [low, high] = [min === undefined ? from.min : min, max === undefined ? from.max : max];
    if (low !== null && high !== null && low > high) errors.set(symbol, "the least lies above the greatest");
    const change = {
      ...(min !== undefined && min !== from.min && { min }),
      ...(max !== undefined && max !== from.max && { max }),
    };
    if (Object.keys(change).length > 0)
      changes[symbol] = { ...change, ...(source.trim() !== "" && { source: source.trim().slice(0, 300) }) };
  }
  return { changes, errors };
}
