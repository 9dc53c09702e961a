// In: edges, block by block. Out: bits, then transactions and bytes, block by block; see decoder.ts for the contract.

import { ConditionDecoder } from "./bits/conditions";
import { createSpikeFilter, spikesAreBelowResolution, view } from "./bits/spikes";
import { Assembler } from "./bus/assembler";
import type { CreateDecoder } from "./decoder";
import type { EdgeBlock } from "./samples/edges";

/** Edges looked at at once: the filter looks ahead over as many, and they are still at hand when they are decoded. */
const PIECE = 1 << 14;

export const createDecoder: CreateDecoder = (head, listener) => {
  const assembler = new Assembler(listener);
  const conditions = new ConditionDecoder(head.levels === "volts", (block) => {
    assembler.bits(block);
    listener.bits(block);
  });
  let edgesSeen = 0;
  function decode(block: EdgeBlock): void {
    conditions.run(block, 0, block.length, edgesSeen);
    edgesSeen += block.length;
  }
  const passAll = head.levels === "digital" && spikesAreBelowResolution(head.timebase, head.sampleTicks);
  const filter = passAll
    ? null
    : createSpikeFilter(head.timebase, {
        edges: decode,
        spike(spike) {
          // Whoever hears of a spike has by then heard of every bit before it, and knows the transaction it stands in.
          conditions.flush();
          listener.spike(spike);
        },
        inHs: () => conditions.inHs(),
      });

  return {
    push(block) {
      if (filter === null) decode(block);
      else
        for (let from = 0; from < block.length; from += PIECE)
          filter.push(view(block, from, Math.min(block.length, from + PIECE)));
      conditions.flush();
      assembler.flush();
    },
    finish(endTick) {
      filter?.finish();
      conditions.finish(endTick);
      assembler.flush();
    },
  };
};
