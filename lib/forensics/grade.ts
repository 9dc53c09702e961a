// In: a probability. Out: the word the report uses for it, and the floor below which nothing is reported.

import type { Contest } from "../diagnosis/report";

/** A contest less probable than this is not reported. */
export const FLOOR = 0.4;

/** certain: drive taps show it. strong: at least 0.9. probable: at least 0.5. weak: below. */
export function gradeOf(probability: number, tapped: boolean): Contest["grade"] {
  if (tapped) return "certain";
  return probability >= 0.9 ? "strong" : probability >= 0.5 ? "probable" : "weak";
}
