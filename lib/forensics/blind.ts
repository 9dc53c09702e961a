// In: the signatures of a capture's controllers. Out: which contests would leave nothing on these lines: pairs where the one that
// keeps the bus looks the same alone as with the other beside it. Only a retry, a log or a tap can speak for those.

import type { BlindPair } from "../diagnosis/report";
import { HOLD_START } from "./message";
import type { Sampling, Signature } from "./signature";
import { together, visibility } from "./together";

/** Pulses of a byte, over which a difference of one pulse adds up. */
const BYTE = 9;

/**
 * Ordered pairs, the one that keeps the bus first. A pair is blind where a whole byte of clocking together differs from the keeper
 * alone by less than one standard deviation, and the other would not have ended the START hold sooner. The first `taps` have a drive
 * tap, which shows when they let go.
 */
export function blindPairs(
  signatures: readonly Signature[],
  { sampling, vdd }: { readonly sampling: Sampling; readonly vdd: number | null },
  taps: number,
  id: (controller: number) => string,
): BlindPair[] {
  const pairs: BlindPair[] = [];
  signatures.forEach((keeper, a) => {
    signatures.forEach((other, b) => {
      if (a === b || b < taps) return;
      const seen = visibility(keeper, together(keeper, other, vdd), sampling.variance) * Math.sqrt(BYTE);
      if (seen < 1 && !endsHoldSooner(keeper, other, sampling)) pairs.push({ kept: id(a), yielded: id(b) });
    });
  });
  return pairs;
}

/** Whether the other, starting at the same instant, would pull SCL noticeably before the keeper does. */
function endsHoldSooner(keeper: Signature, other: Signature, sampling: Sampling): boolean {
  const own = keeper.habits[HOLD_START];
  const its = other.habits[HOLD_START];
  if (own === null || its === null) return false;
  return own.mean - its.mean > Math.sqrt(own.jitter + its.jitter + 2 * sampling.variance);
}
