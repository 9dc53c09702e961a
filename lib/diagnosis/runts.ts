// In: stretches and measured rows. Out: the stretches, each with the first SCL high after it where that is a runt: certainly
// shorter than tHIGH allows. Controllers that miscount a stretch are known by it.

import type { MeasurementRow, Violated } from "../limits/rows";
import type { Stretch } from "./report";

export function withRunts(stretches: readonly Stretch[], rows: readonly MeasurementRow[]): Stretch[] {
  const short = rows
    .filter((row) => row.symbol === "tHIGH")
    .flatMap((row) => row.violations.filter((violated) => violated.side === "min"))
    .sort((a, b) => a.at - b.at);
  if (short.length === 0) return [...stretches];
  return stretches.map((stretch) => {
    const runt = highAfter(stretch, short);
    return runt === null ? stretch : { ...stretch, runt_s: runt.measured };
  });
}

// A short high that begins where the stretched low ends: within a slow rise of it, and before the next low could be over.
function highAfter({ start_s, low_s, excess_s }: Stretch, short: readonly Violated[]): Violated | null {
  const end = start_s + low_s;
  const own = low_s - excess_s;
  let low = 0;
  let high = short.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (short[middle].at < end - own / 2) low = middle + 1;
    else high = middle;
  }
  const found = short[low];
  return found !== undefined && found.at < end + own / 2 ? found : null;
}
