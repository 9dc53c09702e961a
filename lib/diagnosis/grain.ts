// In: edges of a capture in volts. Out: the same with leads and mean levels on the grain that its archive can keep. A capture is read
// from its file once and from its archive ever after: page, command, interface and export must not differ in the last digits.

import { leadStepOf, meanStepOf } from "../engine/archive/format";
import type { EdgeBlock } from "../engine/samples/edges";
import type { CaptureHead } from "../engine/samples/reader";

/** Rounds the voltages of every block; blocks without any are handed on as they are. */
export function grainOf(head: CaptureHead): (block: EdgeBlock) => EdgeBlock {
  const lead = leadStepOf(head);
  const mean = meanStepOf(head);
  const rounded = (column: Float32Array, length: number, step: number) => {
    const out = new Float32Array(length);
    for (let i = 0; i < length; i++) out[i] = Math.round(column[i] / step) * step;
    return out;
  };
  return (block) => {
    const { volts, length } = block;
    if (volts === null) return block;
    // Without a supply there are no volts to show, only levels to compare.
    const level = (column: Float32Array) => (mean === null ? column : rounded(column, length, mean));
    return {
      ...block,
      volts: {
        leadScl: rounded(volts.leadScl, length, lead),
        leadSda: rounded(volts.leadSda, length, lead),
        meanScl: level(volts.meanScl),
        meanSda: level(volts.meanSda),
      },
    };
  };
}
