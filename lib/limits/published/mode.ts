// In: nothing. Out: the shape of a published mode and the lookup over all of them. Times in ns, frequencies in Hz.

import { HIGH_SPEED } from "./high-speed";
import { SMBUS } from "./smbus";
import { STANDARD_TO_FAST_PLUS } from "./standard-fast";

/** One published limit. `min` and `max` are in `unit`; null means that the table prints none. */
export interface PublishedLimit {
  readonly min: number | null;
  readonly max: number | null;
  readonly unit: string;
  readonly source: string;
  /** VERIFIED: read in the source named. MEMORY: recalled, not read. COMPUTED: arithmetic on verified values. */
  readonly status: string;
  readonly note: string;
  readonly minFormula?: string | null;
  readonly advisoryMax?: number | null;
  readonly rev6InternalHoldMin?: number;
}

export interface PublishedMode {
  readonly label: string;
  readonly spec: string;
  readonly note?: string;
  readonly interpolateWith?: string;
  readonly parameters: Readonly<Record<string, PublishedLimit>>;
}

export const PUBLISHED: Readonly<Record<string, PublishedMode>> = { ...STANDARD_TO_FAST_PLUS, ...HIGH_SPEED, ...SMBUS };

/** The mode of that key; asking for one that is not published is our own mistake. */
export function published(key: string): PublishedMode {
  const mode = PUBLISHED[key];
  if (mode === undefined) throw new Error(`no published mode ${key}`);
  return mode;
}
