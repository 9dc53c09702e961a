// In: the edge limits of a table. Out: by how much a capture with one threshold may over-report each interval that has a least
// value. REFERENCE 7: the points of UM10204 Figure 38 lie at 30 % and 70 %, a logic input sees one crossing, taken at 50 %. An RC
// rise crosses it 0.397 tr after the 30 % point and 0.603 tr before the 70 % point, a straight fall half way. How long the edges
// were is not in such a capture; the longest that the table allows are the worst that a lawful bus can hide.

import type { LimitTable } from "./profile";

/** Shares of tr before and after the 50 % crossing of an RC rise: (ln 2 - ln 1/0.7) / ln(0.7/0.3), and the rest. */
export const RISE_TO_HALF = (Math.log(2) - Math.log(1 / 0.7)) / Math.log(0.7 / 0.3);
export const RISE_FROM_HALF = 1 - RISE_TO_HALF;
const HALF_FALL = 0.5;

/** Longest edges, ns. */
interface Edges {
  readonly sclRise: number;
  readonly sclFall: number;
  readonly sdaRise: number;
  readonly sdaFall: number;
}

function longestEdges(table: LimitTable): Edges {
  const longest = (...symbols: string[]) => Math.max(0, ...symbols.map((symbol) => table[symbol]?.max ?? 0));
  return {
    sclRise: longest("tr", "trCL", "trCL1"),
    sclFall: longest("tf", "tfCL"),
    sdaRise: longest("tr", "trDA"),
    sdaFall: longest("tf", "tfDA"),
  };
}

type Hidden = (edges: Edges) => number;

const HIDDEN: Readonly<Record<string, Hidden>> = {
  tLOW: ({ sclRise, sclFall }) => RISE_TO_HALF * sclRise + HALF_FALL * sclFall,
  tHIGH: ({ sclRise, sclFall }) => RISE_FROM_HALF * sclRise + HALF_FALL * sclFall,
  "tHD;STA": ({ sclFall, sdaFall }) => HALF_FALL * (sclFall + sdaFall),
  "tSU;STA": ({ sclRise, sdaFall }) => RISE_FROM_HALF * sclRise + HALF_FALL * sdaFall,
  "tSU;STO": ({ sclRise, sdaRise }) => RISE_FROM_HALF * sclRise + RISE_TO_HALF * sdaRise,
  tBUF: ({ sdaRise, sdaFall }) => RISE_FROM_HALF * sdaRise + HALF_FALL * sdaFall,
  "tSU;DAT": ({ sclRise, sdaRise, sdaFall }) => RISE_TO_HALF * sclRise + Math.max(RISE_FROM_HALF * sdaRise, HALF_FALL * sdaFall),
  "tHD;DAT": ({ sclFall, sdaRise, sdaFall }) => HALF_FALL * sclFall + Math.max(RISE_TO_HALF * sdaRise, HALF_FALL * sdaFall),
};

/** ns by which an interval may truly be shorter than one threshold shows it; 0 where both its points shift alike. */
export function biasNs(symbol: string, table: LimitTable): number {
  return HIDDEN[symbol]?.(longestEdges(table)) ?? 0;
}
